package session

import (
	"path"
	"path/filepath"
	"strings"
)

// Tracks is a track list: one row for each recording of a folder.
type Tracks struct {
	Rows []Row

	index  map[recording]int // where in Rows
	byFile map[string][]int  // the same by file
}

// recording is what a row is about.
type recording struct{ file, bead string }

// Row is what a track list says of one recording.
type Row struct {
	File     string    // path of the recording from the list's folder, with forward slashes
	Bead     string    // which bead of the file; "" for the only one, or for all
	Note     string    // the remark in the column note
	Line     int       // line in the track list, from 1
	Settings *Settings // the settings of the row, FromTracks
}

// Row returns the row of a recording: the one for this bead, else the one of
// the file that names no bead. A nil list has no rows.
func (t *Tracks) Row(file, bead string) (Row, bool) {
	if t == nil {
		return Row{}, false
	}
	file = path.Clean(filepath.ToSlash(file))
	for _, wanted := range []string{bead, ""} {
		if i, ok := t.index[recording{file, wanted}]; ok {
			return t.Rows[i], true
		}
	}
	return Row{}, false
}

// RowsOf returns all rows of a file. A nil list has no rows.
func (t *Tracks) RowsOf(file string) []Row {
	if t == nil {
		return nil
	}
	var rows []Row
	for _, i := range t.byFile[path.Clean(filepath.ToSlash(file))] {
		rows = append(rows, t.Rows[i])
	}
	return rows
}

// LoadTracks reads a track list: a table with the columns file, note, role and any
// settings, by short name (height), by full name (chamber.height), and with
// an axis (noise.x). A column may carry its unit, as in height (um), for cells
// that are plain numbers; an empty cell states nothing. Commas, semicolons or
// tabs separate the cells, as spreadsheets write them; with semicolons or
// tabs a decimal comma is read.
//
// Paths may not leave the folder of the list. Errors are as those of Load.
func LoadTracks(path string) (*Tracks, error) {
	data, err := readFile(path)
	if err != nil {
		return nil, err
	}
	return ReadTracks(path, data)
}

// ReadTracks reads the content of a track list. name stands in messages; its
// last part stands in the settings' places.
func ReadTracks(name string, data []byte) (*Tracks, error) {
	table, err := readTable(name, data)
	if err != nil {
		return nil, err
	}
	l := list{name: name, base: filepath.Base(name), commas: table.delimiter != ',', tracks: &Tracks{index: map[recording]int{}, byFile: map[string][]int{}}}
	l.header(table.rows[0])
	if len(l.problems) > 0 {
		return nil, joined(l.problems)
	}
	for _, cells := range table.rows[1:] {
		l.row(cells)
	}
	if err := joined(l.problems); err != nil {
		return nil, err
	}
	return l.tracks, nil
}

// list walks through the rows of one track list.
type list struct {
	name, base string
	commas     bool // decimal commas are possible: the comma does not separate cells
	columns    []column
	tracks     *Tracks
	problems   []*Error
}

// column is what one column of the list holds.
type column struct {
	kind columnKind
	key  Key
	axis string
	unit string // for cells that are plain numbers
}

type columnKind int

const (
	settingColumn columnKind = iota
	fileColumn
	noteColumn
	emptyColumn
)

func (l *list) report(c cell, e *Error) {
	e.Where = place(l.name, c.line, c.column)
	l.problems = append(l.problems, e)
}

// row reads the cells of one recording.
func (l *list) row(cells []cell) {
	if len(cells) != len(l.columns) {
		l.report(cells[0], &Error{Problem: plural(len(cells), "cell", "cells") + " in this row, but " + plural(len(l.columns), "column", "columns") + " in the header",
			Hint: "give every row as many cells as the header; an empty cell states nothing"})
		return
	}
	row := Row{Line: cells[0].line, Settings: &Settings{}}
	before := len(l.problems)
	for i, c := range cells {
		l.cell(&row, l.columns[i], c)
	}
	if len(l.problems) > before {
		return
	}
	if row.File == "" {
		l.report(cells[0], &Error{Key: "file", Problem: "is empty", Hint: "give the recording that this row is about"})
		return
	}
	if bead, ok := row.Settings.Lookup("recording.bead", ""); ok {
		row.Bead = bead.Word
	}
	about := recording{row.File, row.Bead}
	if i, twice := l.tracks.index[about]; twice {
		l.report(cells[0], &Error{Key: "file", Text: row.File, Problem: "has a row already, in line " + itoa(l.tracks.Rows[i].Line), Hint: "keep one row for each recording; two beads of one file need the column bead"})
		return
	}
	l.problems = append(l.problems, checkPairs(row.Settings)...)
	l.tracks.index[about] = len(l.tracks.Rows)
	l.tracks.byFile[row.File] = append(l.tracks.byFile[row.File], len(l.tracks.Rows))
	l.tracks.Rows = append(l.tracks.Rows, row)
}

// cell takes one cell into the row.
func (l *list) cell(row *Row, col column, c cell) {
	text := strings.TrimSpace(c.text)
	switch {
	case text == "":
	case col.kind == noteColumn:
		row.Note = text
	case col.kind == emptyColumn:
		l.report(c, &Error{Text: text, Problem: "stands in a column without a name", Hint: "name the column in the header, or empty the cell"})
	case col.kind == fileColumn:
		file, problem := fileName(text)
		if problem != nil {
			l.report(c, problem)
		}
		row.File = file
	default:
		text, problem := l.localNumber(col, c.text)
		if problem == nil {
			problem = row.Settings.set(col.key.Name, col.axis, text, FromTracks, place(l.base, c.line, c.column))
		}
		if problem != nil {
			l.report(c, problem)
		}
	}
}

// fileName checks the path of a recording and brings it to its plain form.
func fileName(text string) (string, *Error) {
	if problem := localPath(text); problem != nil {
		return "", &Error{Key: "file", Text: text, Problem: problem.Problem, Hint: "a track list speaks of recordings in its own folder and below, with forward slashes: run.csv, day2/run.csv"}
	}
	if strings.Contains(text, "\n") {
		return "", &Error{Key: "file", Text: text, Problem: "has a line break in it", Hint: "write the name of one file"}
	}
	clean := path.Clean(text)
	if clean == "." {
		return "", &Error{Key: "file", Text: text, Problem: "is a folder", Hint: "write the name of one file"}
	}
	return clean, nil
}
