package session

import (
	"regexp"
	"slices"
	"strings"

	"beadwell/calib/quantity"
)

// headerCell is a column's name with a unit behind it: "height (um)".
var headerCell = regexp.MustCompile(`^(.*?)\s*[(\[]\s*([^()\[\]]+?)\s*[)\]]$`)

// maxColumns bounds the columns of a track list: every setting on every axis, and room.
const maxColumns = 200

// header reads the names of the columns.
func (l *list) header(cells []cell) {
	if len(cells) > maxColumns {
		l.report(cells[0], &Error{Problem: "the header has more than " + itoa(maxColumns) + " columns", Hint: "is this a recording instead of a track list?"})
		return
	}
	files := 0
	for i, c := range cells {
		col, problem := readColumn(strings.TrimSpace(c.text))
		if problem != nil {
			l.report(c, problem)
			continue
		}
		if col.kind == fileColumn {
			files++
		}
		same := func(other column) bool {
			return col.kind != emptyColumn && other.kind == col.kind && other.key.Name == col.key.Name && other.axis == col.axis
		}
		if slices.ContainsFunc(l.columns, same) {
			l.report(cells[i], &Error{Text: c.text, Problem: "is a second column for the same", Hint: "keep one of the two"})
		}
		l.columns = append(l.columns, col)
	}
	if files == 0 && len(l.problems) == 0 {
		l.report(cells[0], &Error{Problem: "the header has no column file", Hint: "the first line names the columns, such as file,role,height"})
	}
}

// readColumn finds what a column's name means.
func readColumn(name string) (column, *Error) {
	unit := ""
	if match := headerCell.FindStringSubmatch(name); match != nil {
		name, unit = match[1], match[2]
	}
	plain := strings.ToLower(strings.ReplaceAll(name, " ", "_"))
	switch {
	case plain == "" && unit == "":
		return column{kind: emptyColumn}, nil
	case plain == "file" && unit == "":
		return column{kind: fileColumn}, nil
	case plain == "note" && unit == "":
		return column{kind: noteColumn}, nil
	}
	key, axis, problem := columnKey(plain)
	if problem != nil {
		problem.Text = name
		return column{}, problem
	}
	if unit != "" {
		if _, bad := parse("1 "+unit, key.Dimensions...); bad != nil || key.Form == Choice || key.Form == Text {
			return column{}, &Error{Text: name, Problem: "has the unit " + quoted(unit) + ", which " + key.Name + " cannot have", Hint: "write " + key.Short() + ", and in the cells " + key.Placeholder}
		}
	}
	return column{key: key, axis: axis, unit: unit}, nil
}

// columnKey finds the setting of a column, by its full or its short name, with
// an axis behind it or not.
func columnKey(name string) (Key, string, *Error) {
	stem, axis := name, ""
	if before, last, ok := cutLast(name, "."); ok && slices.Contains(columns, last) {
		stem, axis = before, last
	}
	key, ok := Find(stem)
	if !ok {
		found := findShort(stem)
		if len(found) > 1 {
			names := make([]string, len(found))
			for i, f := range found {
				names[i] = f.Name
			}
			return Key{}, "", &Error{Problem: "may mean more than one setting", Hint: "write " + strings.Join(names, " or ")}
		}
		if len(found) == 0 {
			return Key{}, "", unknownColumn(name)
		}
		key = found[0]
	}
	if axis == "" && key.AxisOnly {
		return key, "", nil // the cell names the axes: "x=X, y=Y"
	}
	if problem := key.checkAxis(axis, ""); problem != nil {
		return Key{}, "", problem
	}
	return key, axis, nil
}

func cutLast(text, separator string) (before, after string, found bool) {
	i := strings.LastIndex(text, separator)
	if i < 0 {
		return text, "", false
	}
	return text[:i], text[i+len(separator):], true
}

func unknownColumn(name string) *Error {
	candidates := append([]string{"file", "note"}, knownNames()...)
	for _, key := range registry {
		candidates = append(candidates, key.Short())
	}
	e := &Error{Problem: "is neither file, note nor a setting", Hint: "remarks belong in a column named note; the settings are listed in docs/settings.md"}
	if near := nearest(name, candidates); near != "" {
		e.Hint = "did you mean " + near + "? Remarks belong in a column named note"
	}
	return e
}

var (
	commaNumber     = regexp.MustCompile(`(\d),(\d)`)
	thousandsNumber = regexp.MustCompile(`^[+-]?[1-9]\d{0,2},\d{3}(?:[^\d(,]|$)`)
)

// localNumber brings a cell of a quantity to the form that the session file
// has: decimal point, and the unit of the column behind a plain number.
func (l *list) localNumber(col column, text string) (string, *Error) {
	numeric := col.key.Form == Quantity || col.key.Form == Range
	if !numeric {
		return text, nil
	}
	if l.commas {
		if thousandsNumber.MatchString(strings.TrimSpace(text)) {
			return "", &Error{Key: withAxis(col.key.Name, col.axis), Text: text, Problem: "may have a decimal comma or a mark between thousands", Hint: "write a decimal point, and nothing between thousands"}
		}
		text = commaNumber.ReplaceAllString(text, "$1.$2")
	}
	if col.unit != "" {
		if bare, _ := parse(text, quantity.Dimensionless); bare.Text != "" && bare.Unit == "" {
			text = strings.TrimSpace(text) + " " + col.unit
		}
	}
	return text, nil
}
