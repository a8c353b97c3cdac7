package session

import (
	"fmt"
	"slices"
	"strings"

	"github.com/pelletier/go-toml/v2/unstable"
)

// document walks through the expressions of one session file.
type document struct {
	name, base string
	parser     unstable.Parser
	section    []string // the table that the next keys stand in
	skip       bool     // that table is not known, and was reported
	settings   *Settings
	problems   []*Error
}

// position returns line and column of a node, both from 1.
func (d *document) position(n *unstable.Node) (line, column int) {
	start := d.parser.Shape(n.Raw).Start
	return start.Line, start.Column
}

// report places a problem; of those that will not be shown it keeps the count
// alone, since finding a line means counting from the top.
func (d *document) report(n *unstable.Node, e *Error) {
	if d.full() {
		d.problems = append(d.problems, &Error{})
		return
	}
	line, column := d.position(n)
	e.Where = place(d.name, line, column)
	d.problems = append(d.problems, e)
}

func (d *document) full() bool { return len(d.problems) >= maxShown }

func (d *document) expression(n *unstable.Node) {
	switch n.Kind {
	case unstable.Table, unstable.ArrayTable:
		first, parts := keyParts(n.Key())
		d.section = parts
		d.skip = true
		switch {
		case n.Kind == unstable.ArrayTable:
			d.report(first, &Error{Key: strings.Join(parts, "."), Problem: "is a list of tables, but a setting is given once", Hint: "write [" + strings.Join(parts, ".") + "]"})
		case !knownTable(parts):
			d.report(first, unknownTable(strings.Join(parts, ".")))
		default:
			d.skip = false
		}
	case unstable.KeyValue:
		if !d.skip {
			d.keyValue(d.section, n)
		}
	}
}

// keyParts returns the first node of a dotted key and the names in it.
func keyParts(it unstable.Iterator) (first *unstable.Node, parts []string) {
	for it.Next() {
		if first == nil {
			first = it.Node()
		}
		parts = append(parts, string(it.Node().Data))
	}
	return first, parts
}

// knownTable tells whether a table is a section, or a setting by axis.
func knownTable(parts []string) bool {
	if len(parts) == 1 {
		return slices.Contains(sections(), parts[0])
	}
	key, ok := Find(strings.Join(parts, "."))
	return ok && key.PerAxis && len(parts) == 2
}

func unknownTable(name string) *Error {
	e := &Error{Key: name, Problem: "is not a section", Hint: "the sections are " + strings.Join(sections(), ", ")}
	if near := nearest(name, sections()); near != "" {
		e.Hint = "did you mean [" + near + "]?"
	}
	return e
}

// keyValue takes one key, whose value may be a table by axis.
func (d *document) keyValue(prefix []string, n *unstable.Node) {
	first, parts := keyParts(n.Key())
	path := append(slices.Clone(prefix), parts...)
	key, axis, ok := resolve(path)
	value := n.Value()
	inner := value.Kind == unstable.InlineTable
	switch {
	case inner && (len(path) == 1 && knownTable(path) || ok && axis == "" && key.PerAxis):
		for it := value.Children(); it.Next(); {
			d.keyValue(path, it.Node())
		}
	case !ok && d.full():
		d.report(first, nil)
	case !ok:
		d.report(first, unknown(strings.Join(path, "."), ""))
	case key.TrackOnly:
		d.report(first, &Error{Key: key.Name, Problem: "belongs to one recording", Hint: "give it in the column " + key.Short() + " of " + TracksName + ", or with --" + key.Flag})
	default:
		d.value(key, axis, first, value)
	}
}

// resolve finds the setting of a path, whose last part may be an axis.
func resolve(path []string) (key Key, axis string, ok bool) {
	for _, part := range path {
		if strings.Contains(part, ".") {
			return Key{}, "", false
		}
	}
	if key, ok = Find(strings.Join(path, ".")); ok {
		return key, "", true
	}
	last := len(path) - 1
	if key, ok = Find(strings.Join(path[:last], ".")); ok && key.PerAxis {
		return key, path[last], true
	}
	return Key{}, "", false
}

// value keeps one value, which stands at its own place in the file or, when it
// is a list, at that of its key.
func (d *document) value(key Key, axis string, name, value *unstable.Node) {
	text, node, problem := d.text(key, value)
	if node == nil {
		node = name
	}
	if problem == nil {
		line, column := d.position(node)
		problem = d.settings.set(key.Name, axis, text, FromSession, place(d.base, line, column))
	}
	if problem != nil {
		if problem.Key == "" {
			problem.Key = withAxis(key.Name, axis)
		}
		d.report(node, problem)
	}
}

// text returns the text of a value and the node it stands at; none for a list.
func (d *document) text(key Key, value *unstable.Node) (string, *unstable.Node, *Error) {
	example := fmt.Sprintf("write %s = %q", key.Short(), key.Placeholder)
	switch value.Kind {
	case unstable.String, unstable.Integer, unstable.Float:
		return string(value.Data), value, nil
	case unstable.Array:
		if key.Form != RangeList {
			return "", nil, &Error{Problem: "is a list, but has one value", Hint: example}
		}
		return d.list(value)
	case unstable.InlineTable:
		return "", value, &Error{Problem: "is a table, but has one value", Hint: example}
	}
	return "", value, &Error{Text: string(value.Data), Problem: "is not a text", Hint: example}
}

// list joins the texts of a list; an empty one is the word none.
func (d *document) list(value *unstable.Node) (string, *unstable.Node, *Error) {
	var parts []string
	for it := value.Children(); it.Next(); {
		item := it.Node()
		if item.Kind != unstable.String {
			return "", nil, &Error{Problem: "has an item that is not a text", Hint: `write every item in quotation marks, such as ["49 Hz to 51 Hz"]`}
		}
		parts = append(parts, string(item.Data))
	}
	if len(parts) == 0 {
		return "none", nil, nil
	}
	return strings.Join(parts, "; "), nil, nil
}
