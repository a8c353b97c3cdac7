package track

import (
	"strings"
	"unicode/utf8"
)

// cell is one field of a line.
type cell struct {
	text   string
	at     int  // byte offset in the line
	quoted bool // stood in quotes, which are not part of text
}

// splitLine cuts a line into cells and appends them to dst. A delimiter of ' '
// stands for runs of spaces and tabs. It returns the offset of a quote that is
// not closed, or -1.
func splitLine(dst []cell, line string, delimiter byte) (cells []cell, openQuote int) {
	cells = dst
	i, n := 0, len(line)
	for {
		for i < n && (line[i] == ' ' || line[i] == '\t' && delimiter != '\t') {
			i++
		}
		if delimiter == ' ' && i == n {
			return cells, -1
		}
		c := cell{at: i}
		if i+1 < n && line[i] == '=' && line[i+1] == '"' {
			i++ // ="0.5", as spreadsheets write text
		}
		if i < n && line[i] == '"' {
			text, after := unquote(line, i)
			if after < 0 {
				return cells, i
			}
			c.text, c.quoted, i = text, true, after
			for i < n && line[i] == ' ' && delimiter != ' ' {
				i++
			}
			if i < n && !isDelimiter(line[i], delimiter) { // text goes on behind the quote: not a quoted cell
				end := cellEnd(line, i, delimiter)
				c.text, c.quoted, i = line[c.at:end], false, end
			}
		} else {
			end := cellEnd(line, i, delimiter)
			c.text, i = strings.TrimRight(line[i:end], " "), end
		}
		cells = append(cells, c)
		if i >= n {
			return cells, -1
		}
		if delimiter != ' ' {
			i++
			if i == n { // the line ends in a delimiter: an empty last cell
				return append(cells, cell{at: i}), -1
			}
		}
	}
}

func isDelimiter(c, delimiter byte) bool {
	return c == delimiter || delimiter == ' ' && c == '\t'
}

// cellEnd returns the offset of the delimiter at or after i, or the length.
func cellEnd(line string, i int, delimiter byte) int {
	for i < len(line) && !isDelimiter(line[i], delimiter) {
		i++
	}
	return i
}

// unquote returns the text of the quoted cell at line[i] and the offset behind
// its closing quote, or -1 if there is none. A doubled quote is one quote.
func unquote(line string, i int) (text string, after int) {
	var b strings.Builder
	for j := i + 1; j < len(line); j++ {
		switch {
		case line[j] != '"':
			b.WriteByte(line[j])
		case j+1 < len(line) && line[j+1] == '"':
			b.WriteByte('"')
			j++
		default:
			return b.String(), j + 1
		}
	}
	return "", -1
}

// characters turns a byte offset into a column number from 1.
func characters(line string, at int) int {
	return utf8.RuneCountInString(line[:min(at, len(line))]) + 1
}
