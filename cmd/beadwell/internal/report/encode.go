package report

import (
	"bytes"
	"encoding/json"
	"fmt"
	"math"
	"reflect"
	"strconv"
	"strings"
	"sync"

	"beadwell/calib"
)

// encoder writes JSON as encoding/json does, byte for byte, indented by one space or not at all. A result holds
// ten thousand numbers of the type calib.Float, for each of which encoding/json calls a method and parses what it gave; half of the time that a
// recording's files took went there. Kinds that this does not know it leaves to encoding/json; no type of ours but calib.Float
// has a form of its own, which a test holds.
type encoder struct {
	out      []byte
	indented bool
	depth    int
}

var floatType = reflect.TypeFor[calib.Float]()

// jsonOf is a value as JSON, with the characters escaped that a terminal would act on.
func jsonOf(value any, indented bool) (text []byte, err error) {
	e := encoder{out: make([]byte, 0, 256<<10), indented: indented}
	if err := e.value(reflect.ValueOf(value)); err != nil {
		return nil, fmt.Errorf("the result cannot be written as JSON: %w", err)
	}
	return e.out, nil
}

func (e *encoder) value(v reflect.Value) error {
	if !v.IsValid() {
		e.out = append(e.out, "null"...)
		return nil
	}
	if v.Type() == floatType {
		e.float(v.Float())
		return nil
	}
	switch v.Kind() {
	case reflect.Pointer, reflect.Interface:
		if v.IsNil() {
			return e.value(reflect.Value{})
		}
		return e.value(v.Elem())
	case reflect.Struct:
		if fields := fieldsOf(v.Type()); fields != nil {
			return e.object(v, fields)
		}
	case reflect.Slice:
		if v.IsNil() {
			return e.value(reflect.Value{})
		}
		if v.Type().Elem().Kind() != reflect.Uint8 { // bytes are base64
			return e.list(v)
		}
	case reflect.Array:
		return e.list(v)
	case reflect.String:
		return e.text(v.String())
	case reflect.Bool:
		e.out = strconv.AppendBool(e.out, v.Bool())
		return nil
	case reflect.Int, reflect.Int8, reflect.Int16, reflect.Int32, reflect.Int64:
		e.out = strconv.AppendInt(e.out, v.Int(), 10)
		return nil
	}
	return e.other(v.Interface())
}

// float writes the shortest digits that read back to the same bits; null for an unknown number.
func (e *encoder) float(v float64) {
	if math.IsNaN(v) || math.IsInf(v, 0) {
		e.out = append(e.out, "null"...)
		return
	}
	e.out = calib.AppendFloat(e.out, v)
}

// text writes a string. Plain ones, which almost all are, stand as they are.
func (e *encoder) text(s string) error {
	if !strings.ContainsFunc(s, func(r rune) bool { return r < ' ' || r > '~' || r == '"' || r == '\\' }) {
		e.out = append(append(append(e.out, '"'), s...), '"')
		return nil
	}
	return e.other(s)
}

// other writes a value by encoding/json.
func (e *encoder) other(value any) error {
	var b bytes.Buffer
	encoder := json.NewEncoder(&b)
	encoder.SetEscapeHTML(false)
	if e.indented {
		encoder.SetIndent(strings.Repeat(" ", e.depth), " ")
	}
	if err := encoder.Encode(value); err != nil {
		return err
	}
	e.out = append(e.out, escapeInvisible(bytes.TrimSuffix(b.Bytes(), []byte("\n")))...)
	return nil
}

func (e *encoder) object(v reflect.Value, fields []jsonField) error {
	first := true
	for _, m := range fields {
		field := v.Field(m.index)
		if m.omitEmpty && omittable(field) {
			continue
		}
		e.next('{', first)
		first = false
		if e.out = append(e.out, m.name...); e.indented {
			e.out = append(e.out, ' ')
		}
		if err := e.value(field); err != nil {
			return err
		}
	}
	e.close("{}", first)
	return nil
}

func (e *encoder) list(v reflect.Value) error {
	for i := range v.Len() {
		e.next('[', i == 0)
		if err := e.value(v.Index(i)); err != nil {
			return err
		}
	}
	e.close("[]", v.Len() == 0)
	return nil
}

// next begins an element, and with the first one the object or list.
func (e *encoder) next(open byte, first bool) {
	if first {
		e.out = append(e.out, open)
		e.depth++
	} else {
		e.out = append(e.out, ',')
	}
	e.line()
}

// close ends an object or list; brackets are its two.
func (e *encoder) close(brackets string, empty bool) {
	if empty {
		e.out = append(e.out, brackets...)
		return
	}
	e.depth--
	e.line()
	e.out = append(e.out, brackets[1])
}

const blanks = "                                "

// line begins a line.
func (e *encoder) line() {
	if !e.indented {
		return
	}
	e.out = append(e.out, '\n')
	for left := e.depth; left > 0; left -= len(blanks) {
		e.out = append(e.out, blanks[:min(left, len(blanks))]...)
	}
}

// jsonField is one field of a structure as JSON has it.
type jsonField struct {
	index     int
	name      string // quoted, with the colon behind it
	omitEmpty bool
}

var fieldLists sync.Map // of reflect.Type to []jsonField

// fieldsOf lists the members of a structure; nil when encoding/json has to write it.
func fieldsOf(t reflect.Type) []jsonField {
	if fields, ok := fieldLists.Load(t); ok {
		return fields.([]jsonField)
	}
	fields, _ := fieldLists.LoadOrStore(t, newFields(t))
	return fields.([]jsonField)
}

func newFields(t reflect.Type) []jsonField {
	fields := []jsonField{}
	for i := range t.NumField() {
		field := t.Field(i)
		tag := field.Tag.Get("json")
		name, options, _ := strings.Cut(tag, ",")
		switch {
		case field.Anonymous, options != "" && options != "omitempty":
			return nil
		case !field.IsExported(), tag == "-":
			continue
		case name == "":
			name = field.Name
		}
		fields = append(fields, jsonField{i, `"` + name + `":`, options != ""})
	}
	return fields
}

// omittable is what omitempty leaves out.
func omittable(v reflect.Value) bool {
	switch v.Kind() {
	case reflect.Array, reflect.Map, reflect.Slice, reflect.String:
		return v.Len() == 0
	case reflect.Struct:
		return false
	}
	return v.IsZero()
}
