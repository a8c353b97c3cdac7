package report

import (
	"bytes"
	"encoding/hex"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"reflect"
	"sort"
	"strings"
	"unicode/utf8"

	"beadwell/calib"
)

// maxStored bounds a stored result [bytes]: about a hundred times the largest
// that the program writes.
const maxStored = 64 << 20

// ReadJSON reads a stored result. It is strict, so that nothing is lost on the
// way: a key that this version does not know, a missing key, a key twice, a
// number where a word is due, or anything behind the result is an error that
// names the place. Errors are of type *ReadError.
func ReadJSON(r io.Reader) (*calib.Result, error) {
	text, err := io.ReadAll(io.LimitReader(r, maxStored+1))
	if err != nil {
		return nil, &ReadError{What: err.Error()}
	}
	if len(text) > maxStored {
		return nil, &ReadError{What: fmt.Sprintf("is larger than %d bytes, no stored result is", maxStored)}
	}
	result, err := decode(text)
	if err != nil {
		return nil, err
	}
	return result, restore(result)
}

// ReadError says why a stored result cannot be read.
type ReadError struct {
	File         string // set by the caller that knows it
	Line, Column int    // from 1; 0 when the place is a key
	What         string // what is wrong, in words
	Remedy       string
}

// Error gives the place and what is wrong there.
func (e *ReadError) Error() string {
	if e.Line == 0 {
		return e.What
	}
	return fmt.Sprintf("%d:%d: %s", e.Line, e.Column, e.What)
}

func decode(text []byte) (*calib.Result, error) {
	if !utf8.Valid(text) {
		return nil, &ReadError{What: "is not UTF-8 text", Remedy: remedyStored}
	}
	if err := looksStored(text); err != nil {
		return nil, err
	}
	var head struct {
		Schema string `json:"schema"`
	}
	if err := json.Unmarshal(text, &head); err != nil {
		return nil, readError(text, err)
	}
	if head.Schema != calib.SchemaVersion {
		return nil, otherSchema(head.Schema)
	}
	decoder := json.NewDecoder(bytes.NewReader(text))
	decoder.DisallowUnknownFields()
	result := new(calib.Result)
	if err := decoder.Decode(result); err != nil {
		return nil, readError(text, err)
	}
	return result, compareWithSource(text, result)
}

// looksStored refuses what does not begin as a stored result does: a recording, say.
func looksStored(text []byte) error {
	const byteOrderMark = "\ufeff"
	begin := bytes.TrimLeft(text, " \t\r\n")
	switch {
	case len(begin) == 0:
		return &ReadError{What: "is empty", Remedy: remedyStored}
	case bytes.HasPrefix(begin, []byte(byteOrderMark)):
		return &ReadError{What: "begins with a byte order mark, which JSON has none of", Remedy: "save it as plain UTF-8, or take the file that beadwell wrote"}
	case begin[0] != '{':
		return &ReadError{What: fmt.Sprintf("is not a stored result: it begins with %q", excerpt(begin)), Remedy: remedyStored}
	}
	return nil
}

// excerpt is the first line of a text, or its beginning.
func excerpt(text []byte) string {
	const most = 24 // characters
	line, _, _ := strings.Cut(string(text), "\n")
	if runes := []rune(strings.TrimRight(line, "\r")); len(runes) > most {
		return string(runes[:most]) + "..."
	}
	return strings.TrimRight(line, "\r")
}

// others are what else the program writes as JSON, by the name of the schema without its version.
var others = map[string]string{
	"beadwell-check": "what check found", "beadwell-comparison": "what rerun found", "beadwell-drag": "a table of drag",
	"beadwell-force": "forces", "beadwell-plan": "a plan", "beadwell-summary": "the summary of a batch",
}

// otherSchema says what a text of another schema is.
func otherSchema(schema string) *ReadError {
	kind, _, _ := strings.Cut(schema, "/")
	own, _, _ := strings.Cut(calib.SchemaVersion, "/")
	switch {
	case schema == "":
		return &ReadError{What: `is not a stored result: it has no key "schema"`, Remedy: remedyStored}
	case schema == SetVersion:
		return &ReadError{What: "holds the results of several recordings", Remedy: "give one member of its list \"results\""}
	case others[kind] != "":
		return &ReadError{What: fmt.Sprintf("holds %s (%s), not the result of one recording", others[kind], schema), Remedy: remedyStored}
	case kind == own:
		return &ReadError{What: fmt.Sprintf("schema is %q, not %q: another version of the program wrote it", schema, calib.SchemaVersion), Remedy: "use that version, or calibrate the recording again"}
	}
	return &ReadError{What: fmt.Sprintf("schema is %q, not %q", schema, calib.SchemaVersion), Remedy: remedyStored}
}

const remedyStored = "give a result.json, which calibrate --out and batch write for each recording; a recording itself goes to beadwell calibrate"

// readError finds the place of an error of encoding/json.
func readError(text []byte, err error) *ReadError {
	offset := int64(-1)
	what := err.Error()
	var syntax *json.SyntaxError
	var wrongType *json.UnmarshalTypeError
	switch {
	case errors.As(err, &syntax):
		offset, what = syntax.Offset, syntaxWords(text, syntax)
	case errors.As(err, &wrongType):
		offset = wrongType.Offset
		what = fmt.Sprintf("%s holds %s where the program writes %s", keyName(wrongType.Field), valueWords(wrongType.Value), typeWords(wrongType.Type))
	}
	if offset < 0 || offset > int64(len(text)) {
		return &ReadError{What: what, Remedy: remedyStored}
	}
	before := text[:offset]
	line := bytes.Count(before, []byte{'\n'}) + 1
	column := len(before) - bytes.LastIndexByte(before, '\n') - 1
	return &ReadError{Line: line, Column: max(column, 1), What: what, Remedy: remedyStored}
}

// syntaxWords says what is wrong with the JSON, in words of a person.
func syntaxWords(text []byte, err *json.SyntaxError) string {
	place := max(err.Offset-1, 0) // of the character that should not be there
	switch {
	case strings.Contains(err.Error(), "unexpected end"):
		return "is cut: it ends before the result does"
	case strings.Contains(err.Error(), "after top-level value"):
		return fmt.Sprintf("has more behind the result: %q", excerpt(text[place:]))
	}
	return fmt.Sprintf("is not JSON from here on: %q", excerpt(text[place:]))
}

// valueWords are the words for a value of JSON, as its decoder names it.
func valueWords(value string) string {
	switch value {
	case "string":
		return "a text"
	case "array":
		return "a list"
	case "object":
		return "an object"
	case "bool":
		return "true or false"
	case "number":
		return "a number"
	}
	return "the number " + strings.TrimPrefix(value, "number ") // one that no number of the program can hold
}

// typeWords are the words for what a key holds.
func typeWords(t reflect.Type) string {
	switch t.Kind() {
	case reflect.String:
		return "a text"
	case reflect.Bool:
		return "true or false"
	case reflect.Slice, reflect.Array:
		return "a list"
	case reflect.Struct, reflect.Pointer, reflect.Map:
		return "an object"
	}
	return "a number"
}

func keyName(field string) string {
	if field == "" {
		return "a value"
	}
	return field
}

// compareWithSource makes sure that nothing was lost: what is read must be
// written again as it stood.
func compareWithSource(text []byte, result *calib.Result) error {
	written, err := json.Marshal(result)
	if err != nil {
		return &ReadError{What: err.Error()}
	}
	var want, got any
	if err := json.Unmarshal(text, &want); err != nil {
		return readError(text, err)
	}
	if err := json.Unmarshal(written, &got); err != nil {
		return &ReadError{What: err.Error()}
	}
	if place, what := difference("", want, got); what != "" {
		return &ReadError{What: keyName(place) + " " + what, Remedy: remedyStored}
	}
	return checkKeys(text)
}

// difference finds the first place where a value read back differs from its
// source. An optional key whose value is empty may be left out.
func difference(place string, source, back any) (where, what string) {
	switch s := source.(type) {
	case map[string]any:
		b, ok := back.(map[string]any)
		if !ok {
			return place, "is an object where the program writes none"
		}
		return differentKeys(place, s, b)
	case []any:
		b, ok := back.([]any)
		if !ok || len(b) != len(s) {
			return place, fmt.Sprintf("is a list of %d where the program writes another length", len(s))
		}
		for i := range s {
			if where, what := difference(fmt.Sprintf("%s[%d]", place, i), s[i], b[i]); what != "" {
				return where, what
			}
		}
	default:
		if source != back {
			return place, fmt.Sprintf("is %v, which the program would not write", source)
		}
	}
	return "", ""
}

func differentKeys(place string, source, back map[string]any) (where, what string) {
	for _, key := range sortedKeys(source) {
		value, ok := back[key]
		if !ok {
			if isEmpty(source[key]) {
				continue
			}
			return join(place, key), "is not a key of a result"
		}
		if where, what := difference(join(place, key), source[key], value); what != "" {
			return where, what
		}
	}
	for _, key := range sortedKeys(back) {
		if _, ok := source[key]; !ok {
			return join(place, key), "is missing"
		}
	}
	return "", ""
}

func isEmpty(value any) bool {
	switch v := value.(type) {
	case nil:
		return true
	case string:
		return v == ""
	case bool:
		return !v
	case []any:
		return len(v) == 0
	case map[string]any:
		return len(v) == 0
	}
	return false
}

func sortedKeys(object map[string]any) []string {
	keys := make([]string, 0, len(object))
	for key := range object {
		keys = append(keys, key)
	}
	sort.Strings(keys)
	return keys
}

func join(place, key string) string {
	if place == "" {
		return key
	}
	return place + "." + key
}

// checkKeys refuses a key that stands twice in one object: a reader would
// keep one of the two without a word.
func checkKeys(text []byte) error {
	decoder := json.NewDecoder(bytes.NewReader(text))
	var open []map[string]bool // of each open object its keys; nil for a list
	expectKey := false
	for {
		token, err := decoder.Token()
		if errors.Is(err, io.EOF) {
			return nil
		}
		if err != nil {
			return readError(text, err)
		}
		if key, ok := token.(string); ok && expectKey {
			if keys := open[len(open)-1]; keys[key] {
				at := readError(text, &json.SyntaxError{Offset: decoder.InputOffset()})
				at.What = fmt.Sprintf("the key %q stands twice", key)
				return at
			}
			open[len(open)-1][key] = true
			expectKey = false
			continue
		}
		switch token {
		case json.Delim('{'):
			open = append(open, map[string]bool{})
		case json.Delim('['):
			open = append(open, nil)
		case json.Delim('}'), json.Delim(']'):
			open = open[:len(open)-1]
		}
		expectKey = len(open) > 0 && open[len(open)-1] != nil
	}
}

// storable returns a copy of the result in the form that JSON carries: no list
// is nil, and the name of the input is UTF-8.
func storable(r *calib.Result) *calib.Result {
	stored := withLists(r)
	stored.Input = storableInput(r.Input)
	return stored
}

// storableInput keeps a name that is no UTF-8 by its bytes.
func storableInput(in calib.Input) calib.Input {
	if !utf8.ValidString(in.Name) {
		in.NameBytes = hex.EncodeToString([]byte(in.Name))
	}
	return in
}

// restore undoes storable.
func restore(r *calib.Result) error {
	if r.Input.NameBytes == "" {
		return nil
	}
	name, err := hex.DecodeString(r.Input.NameBytes)
	if err != nil || utf8.Valid(name) {
		return &ReadError{What: fmt.Sprintf("input.name_bytes %q is not the hexadecimal form of a name", r.Input.NameBytes), Remedy: remedyStored}
	}
	r.Input.Name, r.Input.NameBytes = string(name), ""
	return nil
}
