package track

import (
	"bufio"
	"bytes"
	"errors"
	"os"
)

// hidden is a cell whose place in its line only the file can tell, once the rows are
// gone.
type hidden struct {
	column    int // of the table, from 0
	delimiter byte
	decode    func(line []byte) string
}

// locate completes the places of such cells: it reads the file once more, up to the
// line.
func locate(path string, err error) error {
	var e *Error
	if !errors.As(err, &e) || e.cell == nil {
		return err
	}
	file, openErr := os.Open(path)
	if openErr != nil {
		return err
	}
	defer file.Close()
	content, _, end, openErr := decompressed(e.File, file)
	if openErr != nil {
		return err
	}
	defer end()
	text, _, openErr := transcode(e.File, content)
	if openErr != nil {
		return err
	}
	lines := bufio.NewScanner(text)
	lines.Buffer(nil, 2*lineLimit)
	lines.Split(anyLine)
	for number := 1; lines.Scan(); number++ {
		if number < e.Line {
			continue
		}
		line := e.cell.decode(lines.Bytes())
		if cells, _ := splitLine(nil, line, e.cell.delimiter); e.cell.column < len(cells) {
			e.Column = characters(line, cells[e.cell.column].at)
		}
		break
	}
	return err
}

// anyLine cuts a text into lines as endLines does. It is a bufio.SplitFunc.
func anyLine(data []byte, final bool) (advance int, line []byte, err error) {
	at := bytes.IndexAny(data, "\r\n")
	if at < 0 {
		if final && len(data) > 0 {
			return len(data), data, nil
		}
		return 0, nil, nil
	}
	end := at
	for end < len(data) && data[end] == '\r' {
		end++
	}
	switch {
	case end == len(data) && !final:
		return 0, nil, nil
	case end < len(data) && data[end] == '\n':
		return end + 1, data[:at], nil
	}
	return at + 1, data[:at], nil
}
