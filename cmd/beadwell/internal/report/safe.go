package report

import (
	"fmt"
	"slices"
	"strings"
	"unicode"
	"unicode/utf8"
)

// Plain returns text that is safe to show on a terminal: control characters,
// terminal escapes, bidirectional and other invisible format characters, line
// breaks and bytes that are no UTF-8 are written as Go escapes such as \x1b.
// Text without any of them is returned as it is.
func Plain(text string) string {
	if isPlain(text) {
		return text
	}
	var b strings.Builder
	for i := 0; i < len(text); {
		r, size := utf8.DecodeRuneInString(text[i:])
		switch {
		case r == utf8.RuneError && size == 1:
			fmt.Fprintf(&b, `\x%02x`, text[i])
		case unicode.IsPrint(r):
			b.WriteRune(r)
		case r < utf8.RuneSelf:
			fmt.Fprintf(&b, `\x%02x`, r)
		case r <= 0xffff:
			fmt.Fprintf(&b, `\u%04x`, r)
		default:
			fmt.Fprintf(&b, `\U%08x`, r)
		}
		i += size
	}
	return b.String()
}

// PlainLines is Plain for text of several lines: line breaks stay.
func PlainLines(text string) string {
	lines := strings.Split(text, "\n")
	for i, line := range lines {
		lines[i] = Plain(line)
	}
	return strings.Join(lines, "\n")
}

func isPlain(text string) bool {
	for i, r := range text {
		if !unicode.IsPrint(r) {
			return false
		}
		if r == utf8.RuneError {
			if _, size := utf8.DecodeRuneInString(text[i:]); size == 1 {
				return false
			}
		}
	}
	return true
}

// cell returns text as a cell of a table that a spreadsheet program reads as
// text: one that would start a formula gets an apostrophe in front.
func cell(text string) string {
	safe := Plain(text)
	first, _ := utf8.DecodeRuneInString(strings.TrimLeft(safe, " \u00a0"))
	if strings.ContainsRune("=+-@＝＋－＠", first) {
		return "'" + safe
	}
	return safe
}

// unusual tells of a byte whether it may be part of a character to escape.
func unusual(b byte) bool { return b != '\n' && (b < ' ' || b > '~') }

// escapeInvisible rewrites encoded JSON so that it can be shown on a terminal:
// the characters that encoding/json leaves as they are although they are
// invisible or steer the terminal become \u escapes, which every reader turns
// back into the same characters. They can stand inside strings only.
func escapeInvisible(encoded []byte) []byte {
	if !slices.ContainsFunc(encoded, unusual) {
		return encoded
	}
	text := string(encoded)
	var b strings.Builder
	b.Grow(len(text))
	for _, r := range text {
		switch {
		case r == '\n' || unicode.IsPrint(r) && r != utf8.RuneError: // encoding/json writes that as \ufffd for a byte that is no UTF-8
			b.WriteRune(r)
		case r <= 0xffff:
			fmt.Fprintf(&b, `\u%04x`, r)
		default:
			high, low := (r-0x10000)>>10+0xd800, (r-0x10000)&0x3ff+0xdc00
			fmt.Fprintf(&b, `\u%04x\u%04x`, high, low)
		}
	}
	return []byte(b.String())
}
