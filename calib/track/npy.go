package track

import (
	"context"
	"encoding/binary"
	"errors"
	"fmt"
	"io"
	"math"
	"regexp"
	"strconv"
	"strings"
)

// npyMagic begins every NumPy array file (format specification "NEP 1", R. Kern,
// 2007, and numpy.lib.format).
const npyMagic = "\x93NUMPY"

// arrayHeader is the description of an array.
type arrayHeader struct {
	fields  []arrayField // one for a plain array
	names   bool         // the fields have names (a structured array)
	fortran bool
	shape   []int
	record  int // bytes of an element
}

// arrayField is a number in an element.
type arrayField struct {
	name   string
	order  binary.ByteOrder
	kind   byte // 'f', 'i', 'u' or 'b'
	size   int
	offset int
	text   string
}

var (
	npyDescr   = regexp.MustCompile(`'descr'\s*:\s*('[^']*'|\[[^\]]*\])`)
	npyFortran = regexp.MustCompile(`'fortran_order'\s*:\s*(True|False)`)
	npyShape   = regexp.MustCompile(`'shape'\s*:\s*\(([0-9,\sL]*)\)`)
	npyPair    = regexp.MustCompile(`\(\s*'([^']*)'\s*,\s*'([^']*)'\s*\)`)
)

// readArray reads a .npy file: one dimension (one axis, or a structured array),
// or two with samples along the longer side.
func readArray(ctx context.Context, r io.Reader, opt Options) (*table, error) {
	bad := func(what string) error {
		return &Error{File: opt.Name, Code: CodeFormat, What: what, Remedy: "save a plain array of numbers with one row per sample"}
	}
	h, err := readArrayHeader(r)
	if err != nil {
		if what, ok := err.(*fault); ok {
			return nil, bad(what.reason)
		}
		return nil, cutArray(opt.Name, err)
	}
	rows, columns := 1, len(h.fields)
	switch len(h.shape) {
	case 1:
		rows = h.shape[0]
	case 2:
		rows, columns = h.shape[0], h.shape[1]
		if h.names {
			return nil, bad("a structured array of two dimensions")
		}
	default:
		return nil, bad(fmt.Sprintf("an array of %d dimensions, one or two are expected", len(h.shape)))
	}
	if columns > rows && columns >= 64 {
		return nil, &Error{File: opt.Name, Code: CodeLayout, What: fmt.Sprintf("the array has %d rows of %d numbers: it seems to lie on its side", rows, columns), Remedy: "transpose it: one row per sample, one column per axis"}
	}
	if columns > columnLimit {
		return nil, &Error{File: opt.Name, Code: CodeLimit, What: fmt.Sprintf("the array has %d columns, the limit is %d", columns, columnLimit), Remedy: "save only the columns that are needed"}
	}
	data := make([][]float64, columns)
	if err := h.fill(ctx, r, data, rows, columns); err != nil {
		if errors.Is(err, ctx.Err()) && ctx.Err() != nil {
			return nil, err
		}
		if what, ok := err.(*fault); ok {
			return nil, bad(what.reason)
		}
		return nil, cutArray(opt.Name, err)
	}
	return arrayTable(h, data, rows, opt)
}

func cutArray(name string, err error) error {
	var known *Error
	if errors.As(err, &known) || !errors.Is(err, io.EOF) && !errors.Is(err, io.ErrUnexpectedEOF) {
		return err
	}
	return &Error{File: name, Code: CodeCut, What: "the array ends too early: the file is cut off", Remedy: "copy or save the file again"}
}

// readArrayHeader reads the description up to the data.
func readArrayHeader(r io.Reader) (*arrayHeader, error) {
	start := make([]byte, 12)
	if _, err := io.ReadFull(r, start[:10]); err != nil {
		return nil, err
	}
	size := int(binary.LittleEndian.Uint16(start[8:]))
	switch start[6] {
	case 1:
	case 2, 3:
		if _, err := io.ReadFull(r, start[10:]); err != nil {
			return nil, err
		}
		size = int(binary.LittleEndian.Uint32(start[8:]))
	default:
		return nil, &fault{reason: fmt.Sprintf("version %d of the array format is not known", start[6])}
	}
	if size > lineLimit {
		return nil, &fault{reason: "the header of the array is longer than 1 MiB"}
	}
	text := make([]byte, size)
	if _, err := io.ReadFull(r, text); err != nil {
		return nil, err
	}
	descr, order, shape := npyDescr.FindSubmatch(text), npyFortran.FindSubmatch(text), npyShape.FindSubmatch(text)
	if descr == nil || order == nil || shape == nil {
		return nil, &fault{reason: "the header of the array is not understood"}
	}
	h := &arrayHeader{fortran: string(order[1]) == "True"}
	for _, part := range strings.Split(string(shape[1]), ",") {
		part = strings.TrimSuffix(strings.TrimSpace(part), "L")
		if part == "" {
			continue
		}
		n, err := strconv.Atoi(part)
		if err != nil || n < 0 || n > 1<<40 {
			return nil, &fault{reason: "the shape of the array is not understood"}
		}
		h.shape = append(h.shape, n)
	}
	return h, h.parseFields(string(descr[1]))
}

// parseFields reads the element type.
func (h *arrayHeader) parseFields(descr string) error {
	if strings.HasPrefix(descr, "'") {
		return h.addField("", strings.Trim(descr, "'"))
	}
	h.names = true
	for _, pair := range npyPair.FindAllStringSubmatch(descr, -1) {
		if err := h.addField(pair[1], pair[2]); err != nil {
			return err
		}
	}
	if len(h.fields) == 0 {
		return &fault{reason: "the element type of the array is not understood"}
	}
	return nil
}

func (h *arrayHeader) addField(name, code string) error {
	f := arrayField{name: name, order: binary.LittleEndian, offset: h.record, text: code}
	rest := strings.TrimLeft(code, "<>|=")
	if strings.HasPrefix(code, ">") {
		f.order = binary.BigEndian
	}
	if len(rest) < 2 {
		return &fault{reason: fmt.Sprintf("elements of type %s are no numbers", quoted(code))}
	}
	size, err := strconv.Atoi(rest[1:])
	f.kind, f.size = rest[0], size
	known := err == nil && (f.kind == 'f' && (size == 4 || size == 8) || (f.kind == 'i' || f.kind == 'u') && (size == 1 || size == 2 || size == 4 || size == 8))
	if !known {
		return &fault{reason: fmt.Sprintf("elements of type %s are no numbers that can be read", quoted(code))}
	}
	h.fields = append(h.fields, f)
	h.record += size
	return nil
}

// value reads one number.
func (f *arrayField) value(b []byte) float64 {
	b = b[f.offset:]
	switch {
	case f.kind == 'f' && f.size == 8:
		return math.Float64frombits(f.order.Uint64(b))
	case f.kind == 'f':
		return float64(math.Float32frombits(f.order.Uint32(b)))
	}
	var bits uint64
	switch f.size {
	case 1:
		bits = uint64(b[0])
	case 2:
		bits = uint64(f.order.Uint16(b))
	case 4:
		bits = uint64(f.order.Uint32(b))
	default:
		bits = f.order.Uint64(b)
	}
	if f.kind == 'u' {
		return float64(bits)
	}
	shift := 64 - 8*f.size
	return float64(int64(bits<<shift) >> shift)
}

// fill reads the data block by block. Columns grow as data arrive, so that a
// false shape costs no memory.
func (h *arrayHeader) fill(ctx context.Context, r io.Reader, data [][]float64, rows, columns int) error {
	perElement := len(h.fields)
	elements := rows * columns / perElement
	buf := make([]byte, max(blockSize/h.record, 1)*h.record)
	for done := 0; done < elements; {
		if err := ctx.Err(); err != nil {
			return err
		}
		n := min(len(buf)/h.record, elements-done)
		if _, err := io.ReadFull(r, buf[:n*h.record]); err != nil {
			return err
		}
		for i := range n {
			for k := range h.fields {
				v := h.fields[k].value(buf[i*h.record:])
				if math.Abs(v) > farthest {
					return &fault{reason: fmt.Sprintf("element %s is %g, which is not finite or beyond anything that is measured", h.index(done+i, k, rows, columns), v)}
				}
				column := k
				if perElement == 1 {
					if column = (done + i) % columns; h.fortran {
						column = (done + i) / max(rows, 1)
					}
				}
				data[column] = append(data[column], v)
			}
		}
		done += n
	}
	return nil
}

// index writes the place of a number as NumPy would: by row and column from 0, or by
// row and name.
func (h *arrayHeader) index(element, field, rows, columns int) string {
	switch {
	case h.names:
		return fmt.Sprintf("[%d][%s]", element, quoted(h.fields[field].name))
	case len(h.shape) == 1:
		return fmt.Sprintf("[%d]", element)
	case h.fortran:
		return fmt.Sprintf("[%d, %d]", element%rows, element/rows)
	}
	return fmt.Sprintf("[%d, %d]", element/columns, element%columns)
}

// arrayTable gives the columns of an array their roles.
func arrayTable(h *arrayHeader, data [][]float64, rows int, opt Options) (*table, error) {
	names := make([]columnInfo, len(data))
	for k := range names {
		if h.names {
			names[k] = parseName(h.fields[k].name)
			names[k].understand()
		}
		names[k].numeric, names[k].whole = true, true
		for _, v := range data[k][:min(len(data[k]), 1000)] {
			names[k].whole = names[k].whole && v == math.Trunc(v)
		}
	}
	p, err := makePlan(opt.Name, names, 0, opt, func(k int) bool {
		t := data[k][:min(len(data[k]), 1000)]
		if len(t) < 4 {
			return false
		}
		step := usualStep(t)
		for i := 1; i < len(t); i++ {
			if !(t[i] > t[i-1]) || math.Abs(t[i]-t[i-1]-step) > 0.2*step {
				return false
			}
		}
		return true
	})
	if err != nil {
		return nil, err
	}
	if err := p.fillUnits(preamble{}, opt); err != nil {
		return nil, err
	}
	tab := &table{plan: p, rows: rows}
	for _, u := range p.uses {
		tab.columns = append(tab.columns, data[u.column])
	}
	if p.time != nil {
		tab.written.shift, tab.written.times = p.time.unit.siShift(), p.time.unit.times
	}
	tab.place = func(row int) *Error { return &Error{File: opt.Name + fmt.Sprintf("[%d]", row)} }
	tab.readAs = ReadAs{Format: "npy", Encoding: h.fields[0].text, Rows: rows, Columns: p.describe(), Rate: math.NaN()}
	return tab, nil
}
