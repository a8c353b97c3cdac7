package session

import (
	"bytes"
	"errors"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"strings"

	"github.com/pelletier/go-toml/v2"
)

// The names under which a folder of recordings keeps its settings.
const (
	FileName   = "session.toml"
	TracksName = "tracks.csv"
)

// maxFile bounds a settings file [bytes]; a track list of 10,000 rows has about 1 MB.
const maxFile = 16 << 20

// Load reads a session file. An unknown key, a value of the wrong dimension and
// an impossible value are errors that name the place, the setting and the
// remedy; the first ten are returned together, each an *Error. An error of the
// file itself is the one of package os.
func Load(path string) (*Settings, error) {
	data, err := readFile(path)
	if err != nil {
		return nil, err
	}
	return Read(path, data)
}

// readFile reads a regular file of bounded size.
func readFile(path string) ([]byte, error) {
	f, err := os.Open(path)
	if err != nil {
		return nil, err
	}
	defer f.Close()
	if info, err := f.Stat(); err != nil {
		return nil, err
	} else if !info.Mode().IsRegular() {
		return nil, &Error{Where: path, Problem: "is not a regular file"}
	}
	data, err := io.ReadAll(io.LimitReader(f, maxFile+1))
	if err != nil {
		return nil, err
	}
	if len(data) > maxFile {
		return nil, &Error{Where: path, Problem: "is larger than 16 MiB", Hint: "is this the recording instead of its settings?"}
	}
	return data, nil
}

// maxSession bounds a session file [bytes]; the template has 4 kB, and the
// library's check for keys given twice takes quadratic time.
const maxSession = 64 << 10

var byteOrderMark = []byte("\xef\xbb\xbf")

// Read reads the content of a session file. name stands in messages; its last
// part stands in the settings' places.
func Read(name string, data []byte) (*Settings, error) {
	if len(data) > maxSession {
		return nil, &Error{Where: name, Problem: "is larger than 64 KiB", Hint: "is this a recording instead of its settings?"}
	}
	data = bytes.TrimPrefix(data, byteOrderMark)
	if problem := validTOML(name, data); problem != nil {
		return nil, problem
	}
	d := document{name: name, base: filepath.Base(name), settings: &Settings{}}
	d.parser.Reset(data)
	for d.parser.NextExpression() {
		d.expression(d.parser.Expression())
	}
	if err := d.parser.Error(); err != nil {
		return nil, &Error{Where: name, Problem: strings.TrimPrefix(err.Error(), "toml: ")}
	}
	if len(d.problems) == 0 {
		d.problems = checkPairs(d.settings)
	}
	if err := joined(d.problems); err != nil {
		return nil, err
	}
	return d.settings, nil
}

// validTOML lets the library check the whole: syntax, keys given twice.
func validTOML(name string, data []byte) error {
	var all map[string]any
	err := toml.Unmarshal(data, &all)
	if err == nil {
		return nil
	}
	problem := &Error{Where: name, Problem: strings.TrimPrefix(err.Error(), "toml: "), Hint: `a setting is written key = "value", under the [section] it belongs to`}
	var decode *toml.DecodeError
	if errors.As(err, &decode) {
		line, column := decode.Position()
		problem.Where = place(name, line, column)
	}
	return problem
}

func place(name string, line, column int) string { return fmt.Sprintf("%s:%d:%d", name, line, column) }
