package session

import (
	"bytes"
	"encoding/csv"
	"errors"
	"io"
	"strconv"
	"strings"
	"unicode/utf8"

	"golang.org/x/text/encoding/unicode"
	"golang.org/x/text/transform"
)

// cell is one cell of a table and its place, both from 1, the column in bytes.
type cell struct {
	text         string
	line, column int
}

// table is the content of a delimited file; it has at least a header.
type table struct {
	delimiter rune
	rows      [][]cell
}

// readTable reads what spreadsheets write: UTF-8 with or without a byte order
// mark, UTF-16 with one, any line ends, commas, semicolons or tabs, a line
// "sep=;" in front, rows of empty cells behind.
func readTable(name string, data []byte) (table, error) {
	text, problem := decodeText(data)
	if problem != nil {
		problem.Where = name
		return table{}, problem
	}
	text, skipped, delimiter := cutSeparator(text)
	if delimiter == 0 {
		delimiter = findDelimiter(text)
	}
	t := table{delimiter: delimiter}
	reader := csv.NewReader(strings.NewReader(text))
	reader.Comma = delimiter
	reader.FieldsPerRecord = -1
	reader.TrimLeadingSpace = delimiter != '\t'
	for {
		record, err := reader.Read()
		if errors.Is(err, io.EOF) {
			break
		}
		if err != nil {
			return table{}, tableError(name, skipped, err)
		}
		row := make([]cell, len(record))
		for i, field := range record {
			line, column := reader.FieldPos(i)
			row[i] = cell{field, line + skipped, column}
		}
		if strings.TrimSpace(strings.Join(record, "")) != "" {
			t.rows = append(t.rows, row)
		}
	}
	if len(t.rows) == 0 {
		return table{}, &Error{Where: name, Problem: "is empty", Hint: "the first line names the columns, such as file,role,height"}
	}
	return t, nil
}

// decodeText returns the text in UTF-8 with LF line ends.
func decodeText(data []byte) (string, *Error) {
	data, marked := bytes.CutPrefix(data, byteOrderMark)
	if !marked {
		if decoded, _, err := transform.Bytes(unicode.BOMOverride(transform.Nop), data); err == nil {
			data = decoded
		}
	}
	if !utf8.Valid(data) || bytes.IndexByte(data, 0) >= 0 {
		return "", &Error{Problem: "is not a text in UTF-8", Hint: "save it from the spreadsheet as CSV in UTF-8"}
	}
	return strings.NewReplacer("\r\n", "\n", "\r", "\n").Replace(string(data)), nil
}

// cutSeparator takes a first line "sep=;" off, which some spreadsheets write.
func cutSeparator(text string) (rest string, skipped int, delimiter rune) {
	first, rest, _ := strings.Cut(text, "\n")
	mark, ok := strings.CutPrefix(strings.ToLower(strings.Trim(first, `"`)), "sep=")
	if !ok || !strings.Contains(",;\t", mark) || len(mark) != 1 {
		return text, 0, 0
	}
	return rest, 1, rune(mark[0])
}

// findDelimiter takes the delimiter that stands most often in the header.
func findDelimiter(text string) rune {
	header, _, _ := strings.Cut(strings.TrimLeft(text, "\n"), "\n")
	best, most := ',', 0
	for _, candidate := range ",;\t" {
		if n := strings.Count(header, string(candidate)); n > most {
			best, most = candidate, n
		}
	}
	return best
}

func tableError(name string, skipped int, err error) *Error {
	e := &Error{Where: name, Problem: err.Error()}
	var parse *csv.ParseError
	if errors.As(err, &parse) {
		line, column := parse.Line, parse.Column
		e.Problem = parse.Err.Error()
		if errors.Is(err, csv.ErrQuote) || errors.Is(err, csv.ErrBareQuote) {
			if parse.StartLine != line {
				line, column = parse.StartLine, 1 // where it opened, not where the file ended
			}
			e.Problem = "a quotation mark is not closed, or stands inside a cell"
			e.Hint = "close it, or write two for one that belongs to the text"
		}
		e.Where = place(name, line+skipped, column)
	}
	return e
}

func itoa(n int) string { return strconv.Itoa(n) }

func plural(n int, one, many string) string {
	if n == 1 {
		return "1 " + one
	}
	return itoa(n) + " " + many
}
