package track

import (
	"bytes"
	"encoding/binary"
	"io"
	"unicode/utf8"

	"golang.org/x/text/encoding/unicode"
	"golang.org/x/text/transform"
)

// sampleSize is how much of a file is looked at before its rows are parsed.
const sampleSize = 1 << 20

// foreign lists the beginnings of files that are no tables of text.
var foreign = []struct{ start, what, remedy string }{
	{"PK\x03\x04", "a spreadsheet or a zip archive", "export the table as CSV text"},
	{"\xd0\xcf\x11\xe0", "an old spreadsheet or office document", "export the table as CSV text"},
	{"\x89HDF", "an HDF5 file", "export the track as CSV text or as .npy"},
	{"MATLAB 5.0", "a MAT file", "export the track as CSV text or as .npy"},
	{"%PDF", "a PDF document", "export the table as CSV text"},
	{"\x89PNG", "a picture", "give the track, not its picture"},
	{"\xff\xd8\xff", "a picture", "give the track, not its picture"},
	{"II*\x00", "a picture stack", "track the particle first and give its positions"},
	{"MM\x00*", "a picture stack", "track the particle first and give its positions"},
	{"\xfd7zXZ", "an xz archive", "unpack it first, or use gzip or zstd"},
	{"7z\xbc\xaf", "a 7z archive", "unpack it first, or use gzip or zstd"},
	{"{\\rtf", "a word processor document", "export the table as CSV text"},
	{"TDSm", "a TDMS file", "export the track as CSV text or as .npy"},
}

// checkForeign refuses what is plainly no table of text, by its content.
func checkForeign(name string, head []byte) error {
	for _, f := range foreign {
		if bytes.HasPrefix(head, []byte(f.start)) {
			return &Error{File: name, Line: 1, Column: 1, Code: CodeFormat, What: "this is " + f.what + ", a table of text is expected", Remedy: f.remedy}
		}
	}
	start := bytes.ToLower(bytes.TrimLeft(head[:min(len(head), 512)], " \t\r\n\ufeff"))
	for _, tag := range []string{"<!doctype", "<html", "<head", "<table", "<body", "<?xml", "<svg", "<workbook"} {
		if bytes.HasPrefix(start, []byte(tag)) {
			return &Error{File: name, Line: 1, Column: 1, Code: CodeFormat, What: "this is an HTML or XML document, a table of text is expected",
				Remedy: "export the table as CSV text; a download may have given a web page instead of the file"}
		}
	}
	if bytes.HasPrefix(start, []byte("{")) || bytes.HasPrefix(start, []byte("[{")) || bytes.HasPrefix(start, []byte("[[")) {
		return &Error{File: name, Line: 1, Column: 1, Code: CodeFormat, What: "this is JSON, a table of text is expected", Remedy: "export the table as CSV text"}
	}
	return nil
}

// transcode finds the encoding of a text by its first bytes and returns it as
// UTF-8, or as it is for UTF-8 and for single-byte encodings.
func transcode(name string, r io.Reader) (text io.Reader, encoding string, err error) {
	start := make([]byte, 4096)
	n, err := io.ReadFull(r, start)
	if err != nil && err != io.EOF && err != io.ErrUnexpectedEOF {
		return nil, "", err
	}
	start = start[:n]
	all := io.MultiReader(bytes.NewReader(start), r)
	if err := checkForeign(name, start); err != nil {
		return nil, "", err
	}
	order, utf16 := unicode.LittleEndian, false
	even, odd := 0, 0
	for i, c := range start {
		if c == 0 && i%2 == 0 {
			even++
		} else if c == 0 {
			odd++
		}
	}
	half := n / 2
	switch {
	case bytes.HasPrefix(start, []byte("\xff\xfe")):
		utf16 = true
	case bytes.HasPrefix(start, []byte("\xfe\xff")):
		order, utf16 = unicode.BigEndian, true
	case half >= 4 && odd*10 > half*8 && even*10 < half:
		utf16 = true
	case half >= 4 && even*10 > half*8 && odd*10 < half:
		order, utf16 = unicode.BigEndian, true
	}
	if utf16 {
		encoding = "UTF-16LE"
		if order == unicode.BigEndian {
			encoding = "UTF-16BE"
		}
		return transform.NewReader(all, unicode.UTF16(order, unicode.UseBOM).NewDecoder()), encoding, nil
	}
	return all, "UTF-8", nil
}

// checkBinary refuses a sample with bytes that no text has, other than the
// padding at its end.
func checkBinary(name string, sample []byte) error {
	text := bytes.TrimRight(sample, "\x00\x1a")
	for i := 0; i < len(text); i++ {
		for i+8 <= len(text) && (binary.LittleEndian.Uint64(text[i:])-0x20*ones)&^binary.LittleEndian.Uint64(text[i:])&highs == 0 {
			i += 8 // none below 0x20
		}
		if i == len(text) {
			break
		}
		c := text[i]
		if c >= 0x20 || c == '\n' || c == '\t' || c == '\r' || c == '\f' || c == '\v' || c == 0x1a || c == 0x1b {
			continue
		}
		if c == 0 && len(bytes.Trim(text[i:], "\x00\x1a\r\n ")) == 0 {
			return nil
		}
		line := 1 + bytes.Count(text[:i], []byte{'\n'})
		at := bytes.LastIndexByte(text[:i], '\n')
		return &Error{File: name, Line: line, Column: i - at, Code: CodeFormat, What: "this is binary data, a table of text is expected",
			Remedy: "export the recording as CSV text or as .npy"}
	}
	return nil
}

// isLegacy tells whether a sample is no valid UTF-8 and so in a single-byte
// encoding. whole tells that the sample does not end inside a character.
func isLegacy(sample []byte, whole bool) bool {
	if !whole {
		for i := 0; i < utf8.UTFMax && len(sample) > 0 && sample[len(sample)-1] >= utf8.RuneSelf; i++ {
			sample = sample[:len(sample)-1]
		}
	}
	return !utf8.Valid(sample)
}

// endLines turns every carriage return that ends a line by itself into a newline,
// in place, and those that pile up before a newline into blanks. It reports whether
// there was one of the first kind. Returns at the end of b wait for what follows,
// unless b is final.
func endLines(b []byte, final bool) (lone bool) {
	for at := bytes.IndexByte(b, '\r'); at >= 0; {
		end := at
		for end < len(b) && b[end] == '\r' {
			end++
		}
		switch {
		case end == len(b) && !final:
			return lone
		case end < len(b) && b[end] == '\n':
			fill(b[at:end-1], ' ')
		default:
			fill(b[at:end], '\n')
			lone = true
		}
		next := bytes.IndexByte(b[end:], '\r')
		if next < 0 {
			return lone
		}
		at = end + next
	}
	return lone
}

func fill(b []byte, c byte) {
	for i := range b {
		b[i] = c
	}
}
