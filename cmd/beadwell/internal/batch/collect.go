package batch

import (
	"fmt"
	"io/fs"
	"os"
	"path"
	"path/filepath"
	"slices"
	"strings"

	"beadwell/cmd/beadwell/internal/report"
)

// Collect joins folders of results, in any order, into one: the bytes are those of one run
// over all of their recordings. A folder holds a whole batch, or any number of the shards of
// one list, and may be out itself.
//
// The error says which shards are missing, or which recordings disagree.
func Collect(folders []string, out string, opt SeriesOptions) (*Summary, error) {
	if err := os.MkdirAll(out, 0o777); err != nil {
		return nil, errOutput{err}
	}
	root, err := os.OpenRoot(out)
	if err != nil {
		return nil, errOutput{err}
	}
	defer root.Close()
	joined := joining{entries: map[string]entry{}, shards: map[string]bool{}, sharded: map[string]bool{}, owner: map[string]string{}}
	for _, folder := range folders {
		if err := joined.folder(folder, root, sameFolder(folder, out)); err != nil {
			return nil, err
		}
	}
	if err := joined.complete(); err != nil {
		return nil, err
	}
	entries := joined.ordered()
	if err := writeJournal(root, journalName, header{Schema: journalSchema, Files: len(entries)}, entries); err != nil {
		return nil, errOutput{err}
	}
	summary := newSummary(entries, nil, opt)
	if err := summary.write(root); err != nil {
		return nil, errOutput{err}
	}
	for _, name := range joined.inPlace { // the whole journal holds them now
		if err := root.Remove(name); err != nil {
			return nil, errOutput{err}
		}
	}
	return summary, nil
}

// fileError is an error about a folder of results, or a file in it.
func fileError(file, format string, args ...any) error {
	return &report.FileError{File: file, Err: fmt.Errorf(format, args...)}
}

type joining struct {
	entries map[string]entry
	shards  map[string]bool
	list    int               // recordings of the list that the shards are parts of; 0 without shards
	sharded map[string]bool   // of them, those that are there
	owner   map[string]string // recording whose outputs a folder holds, by its name in lower case
	inPlace []string          // journals of shards in the folder of results itself
}

func sameFolder(a, b string) bool {
	one, err1 := os.Stat(a)
	two, err2 := os.Stat(b)
	return err1 == nil && err2 == nil && os.SameFile(one, two)
}

// folder takes in the journals of one folder, and copies the outputs unless they are in
// place.
func (j *joining) folder(folder string, out *os.Root, inPlace bool) error {
	root, err := os.OpenRoot(folder)
	if err != nil {
		return err
	}
	defer root.Close()
	journals, err := fs.Glob(root.FS(), journalPattern)
	if err != nil || len(journals) == 0 {
		return fileError(folder, "holds no journal of a batch")
	}
	if len(journals) > 1 { // the whole, from an earlier collect, besides its shards
		journals = slices.DeleteFunc(journals, func(name string) bool { return name == journalName })
	}
	for _, name := range journals {
		head, entries, err := readJournal(root, name)
		if err != nil {
			return fileError(folder, "%w", err)
		}
		if err := j.head(filepath.Join(folder, name), head, len(entries)); err != nil {
			return err
		}
		if inPlace && name != journalName {
			j.inPlace = append(j.inPlace, name)
		}
		for file, e := range entries {
			if head.Shard != "" {
				j.sharded[file] = true
			}
			if err := j.take(file, e, folder); err != nil {
				return err
			}
			if inPlace {
				continue
			}
			if err := copyOutputs(root, out, e); err != nil {
				return fileError(folder, "%w", err)
			}
		}
	}
	return nil
}

// head takes in what a journal says of its list, of which it has so many entries.
func (j *joining) head(path string, head header, entries int) error {
	switch {
	case head.Shard == "" && head.Files != entries:
		return fileError(path, "%d of %d recordings are there; run that batch to its end first", entries, head.Files)
	case head.Shard == "":
		return nil
	case j.list != 0 && j.list != head.Files:
		return fileError(path, "is part of a list of %d recordings, others of one of %d; give shards of one run", head.Files, j.list)
	}
	j.list, j.shards[head.Shard] = head.Files, true
	return nil
}

func (j *joining) take(file string, e entry, folder string) error {
	if other, twice := j.entries[file]; twice && (other.SHA256 != e.SHA256 || other.Fingerprint != e.Fingerprint) {
		return fileError(folder, "%s was calibrated twice, with other content or settings; run the shards again", file)
	}
	name := strings.ToLower(e.Folder) // as file systems that ignore case see it
	if other, taken := j.owner[name]; taken && other != file {
		return fileError(folder, "%s and %s, of two batches, both have the folder %s; do them in one batch", other, file, e.Folder)
	}
	j.entries[file], j.owner[name] = e, file
	return nil
}

func copyOutputs(from, to *os.Root, e entry) error {
	for name, want := range e.Outputs {
		content, err := from.ReadFile(name)
		if err != nil {
			return err
		}
		if hexSum(content) != want {
			return fmt.Errorf("%s: was changed after it was written; run the shard again", name)
		}
		if err := to.MkdirAll(path.Dir(name), 0o777); err != nil {
			return errOutput{err}
		}
		if err := writeFile(to, name, content); err != nil {
			return errOutput{err}
		}
	}
	return nil
}

// complete refuses a list with recordings missing.
func (j *joining) complete() error {
	if len(j.sharded) == j.list {
		return nil
	}
	var have []string
	for shard := range j.shards {
		have = append(have, shard)
	}
	slices.SortFunc(have, natural)
	return fmt.Errorf("%d of %d recordings are there (shards %s); run the missing shards, or those that were stopped, again", len(j.sharded), j.list, strings.Join(have, ", "))
}

func (j *joining) ordered() []entry {
	var all []entry
	for _, e := range j.entries {
		all = append(all, e)
	}
	slices.SortFunc(all, func(a, b entry) int { return natural(a.File, b.File) })
	return all
}
