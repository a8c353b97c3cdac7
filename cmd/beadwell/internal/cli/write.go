package cli

import (
	"bytes"
	"context"
	"errors"
	"io"
	"os"
	"path/filepath"
	"slices"

	"github.com/google/renameio/v2"

	"beadwell/calib"
	"beadwell/cmd/beadwell/internal/figure"
	"beadwell/cmd/beadwell/internal/report"
)

// resultWriter writes the outputs of recordings into the folder of --out, each
// recording into a folder of its own. Without --out it does nothing.
type resultWriter struct {
	root   *os.Root
	parent string
	force  bool
	names  map[string]string // folder of each track
	files  func(context.Context, *calib.Result) ([]file, error)
	// pending is that of each outputFolder.
	pending func(name string, opts ...renameio.Option) (pendingFile, error)
}

// The names of the files; figures have names of their own.
const (
	resultJSON = "result.json"
	resultText = "result.txt"
	resultCSV  = "result.csv"
	reportHTML = "report.html"
)

// newResultWriter opens the folder and makes sure that it can be written to, before
// the long computation.
func newResultWriter(out string, force bool, tracks []string) (*resultWriter, error) {
	if out == "" {
		return &resultWriter{}, nil
	}
	names, err := folderNames(tracks)
	if err != nil {
		return nil, err
	}
	root, err := openParent(out)
	if err != nil {
		return nil, err
	}
	w := &resultWriter{root: root, parent: out, force: force, names: map[string]string{}, files: outputs}
	for i, path := range tracks {
		w.names[path] = names[i]
	}
	if err := w.folder("").probe(); err != nil {
		w.close()
		return nil, err
	}
	return w, nil
}

func (w *resultWriter) close() {
	if w.root != nil {
		w.root.Close()
	}
}

func (w *resultWriter) folder(name string) outputFolder {
	return outputFolder{root: w.root, parent: w.parent, name: name, pending: w.pending}
}

// writeAll writes the outputs of every recording that has a result. It goes on
// after one that cannot be written, and returns all errors.
func (w *resultWriter) writeAll(ctx context.Context, outcomes []outcome) error {
	var all []error
	for _, one := range outcomes {
		if one.result != nil && w.root != nil {
			all = append(all, w.write(ctx, one.path, one.result))
		}
	}
	return errors.Join(all...)
}

// file is one output of a recording.
type file struct {
	name    string
	content []byte
}

// write writes all outputs of a recording. The result as JSON comes first: it
// tells a later run whose outputs these are.
func (w *resultWriter) write(ctx context.Context, path string, r *calib.Result) error {
	name := w.names[path]
	if r.Input.Bead != "" {
		name += "-" + safeName(r.Input.Bead)
	}
	folder := w.folder(name)
	files, err := w.files(ctx, r)
	if err != nil {
		return err
	}
	if err := folder.make(); err != nil {
		return err
	}
	if err := w.mayReplace(folder, files, r); err != nil {
		return err
	}
	for _, f := range files {
		if err := folder.write(ctx, f.name, f.content); err != nil {
			return err
		}
	}
	return nil
}

// mayReplace refuses to replace files that are not outputs for the same
// recording, unless --force was given.
func (w *resultWriter) mayReplace(folder outputFolder, files []file, r *calib.Result) error {
	if w.force || folder.belongsTo(r) {
		return nil
	}
	for _, f := range files {
		exists, err := folder.check(f.name)
		if err != nil {
			return err
		}
		if exists {
			return &failure{status: StatusUsage, code: codeOutput, err: &report.FileError{File: folder.path(f.name), Err: errors.New("is there already, and not from this recording")},
				remedy: "choose another --out, or add --force to replace it"}
		}
	}
	return nil
}

// belongsTo tells whether the folder holds the outputs of this very recording.
func (f outputFolder) belongsTo(r *calib.Result) bool {
	text, err := f.read(resultJSON)
	if err != nil {
		return false
	}
	stored, err := report.ReadJSON(bytes.NewReader(text))
	return err == nil && stored.Program.Name == r.Program.Name && stored.Input.SHA256 == r.Input.SHA256 && stored.Input.Bead == r.Input.Bead
}

// outputs makes the content of every file from the result alone, with figures in the
// default forms.
func outputs(ctx context.Context, r *calib.Result) ([]file, error) {
	return drawing{}.all(ctx, r)
}

// forms make the content of the files but the figures.
var forms = []struct {
	name string
	make func(io.Writer, *report.Prepared) error
}{
	{resultJSON, func(w io.Writer, made *report.Prepared) error { return report.JSON(w, made.Result) }},
	{resultText, func(w io.Writer, made *report.Prepared) error {
		return report.Text(w, made.Result, report.TextOptions{})
	}},
	{resultCSV, func(w io.Writer, made *report.Prepared) error {
		return report.CSV(w, report.Set{Results: []*calib.Result{made.Result}})
	}},
	{reportHTML, func(w io.Writer, made *report.Prepared) error { return made.HTML(w) }},
}

// reports makes the content of the named files.
func reports(made *report.Prepared, names []string) (files []file, err error) {
	for _, form := range forms {
		if !slices.Contains(names, form.name) {
			continue
		}
		var content bytes.Buffer
		if err := form.make(&content, made); err != nil {
			return nil, err
		}
		files = append(files, file{form.name, content.Bytes()})
	}
	return files, nil
}

// figureFiles draws figures in each of the formats.
func figureFiles(ctx context.Context, figures []figure.Figure, formats []figure.Format) ([]file, error) {
	var files []file
	for _, format := range formats {
		drawn, err := figure.RenderAll(ctx, figures, format, figure.Light)
		if err != nil {
			return nil, err
		}
		for i, f := range figures {
			files = append(files, file{f.Name + "." + string(format), drawn[i]})
		}
	}
	return files, nil
}

// make makes the folder of a recording; a link in its place is refused.
func (f outputFolder) make() error {
	if err := f.root.Mkdir(f.name, 0o777); err != nil && !os.IsExist(err) {
		return outputError(f.path(""), err)
	}
	info, err := f.root.Lstat(f.name)
	if err != nil {
		return outputError(f.path(""), err)
	}
	if !info.IsDir() {
		return notFollowed(filepath.Clean(f.path("")), info)
	}
	return nil
}
