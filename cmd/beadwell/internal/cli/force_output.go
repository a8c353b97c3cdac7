package cli

import (
	"context"
	"errors"
	"io"
	"os"
	"path/filepath"

	"github.com/google/renameio/v2"

	"beadwell/cmd/beadwell/internal/figure"
	"beadwell/cmd/beadwell/internal/report"
)

// sheets is the folder for the outputs of plan and force. Without --out it takes
// everything and writes nothing.
type sheets struct {
	root    *os.Root
	folder  outputFolder
	replace bool
}

// openSheets opens the folder name in that of --out, and makes sure that it can be
// written to, before the computation.
func openSheets(out, name string, replace bool) (*sheets, error) {
	if out == "" {
		return &sheets{}, nil
	}
	root, err := openParent(out)
	if err != nil {
		return nil, err
	}
	s := &sheets{root: root, folder: outputFolder{root: root, parent: out, name: name}, replace: replace}
	if name != "" {
		err = s.folder.make()
	}
	if err == nil {
		err = s.folder.probe()
	}
	if err != nil {
		s.close()
		return nil, err
	}
	return s, nil
}

func (s *sheets) close() {
	if s.root != nil {
		s.root.Close()
	}
}

// check refuses to replace files, unless that was asked for.
func (s *sheets) check(names ...string) error {
	if s.root == nil {
		return nil
	}
	for _, name := range names {
		exists, err := s.folder.check(name)
		if err != nil {
			return err
		}
		if exists && !s.replace {
			return &failure{status: StatusUsage, code: codeOutput, err: &report.FileError{File: s.folder.path(name), Err: errors.New("is there already")},
				remedy: "choose another --out, or add --force to replace it"}
		}
	}
	return nil
}

// write writes the files, and the figures as SVG and PNG.
func (s *sheets) write(ctx context.Context, files []file, figures ...figure.Figure) error {
	if s.root == nil {
		return nil
	}
	for _, format := range []figure.Format{figure.SVG, figure.PNG} {
		drawn, err := figure.RenderAll(ctx, figures, format, figure.Light)
		if err != nil {
			return err
		}
		for i, f := range figures {
			files = append(files, file{f.Name + "." + string(format), drawn[i]})
		}
	}
	for _, f := range files {
		if err := s.check(f.name); err != nil {
			return err
		}
	}
	for _, f := range files {
		if err := s.folder.write(ctx, f.name, f.content); err != nil {
			return err
		}
	}
	return nil
}

// stream writes a file as it is made, for one that is too large to be held; it has its
// name when it is whole.
func (s *sheets) stream(name string, content func(io.Writer) error) error {
	if s.root == nil {
		return nil
	}
	if err := s.check(name); err != nil {
		return err
	}
	pending, err := renameio.NewPendingFile(filepath.Join(s.folder.name, name), renameio.WithRoot(s.root), renameio.WithPermissions(0o666))
	if err != nil {
		return outputError(s.folder.path(name), err)
	}
	defer pending.Cleanup() // does nothing after a rename
	if err := content(pending); err != nil {
		return outputError(s.folder.path(name), err)
	}
	if err := pending.CloseAtomicallyReplace(); err != nil {
		return outputError(s.folder.path(name), err)
	}
	return nil
}
