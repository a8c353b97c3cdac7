package batch

import (
	"bufio"
	"bytes"
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
)

// The journal is a text of one JSON object a line: a header, then an entry for each recording
// that was done. A run appends to it; when all is done it is written anew, in the
// order of the recordings.
const (
	journalSchema  = "beadwell-journal/1"
	journalName    = "journal.jsonl"
	journalPattern = "journal*.jsonl" // shards have a journal each
)

// header is the first line.
type header struct {
	Schema string `json:"schema"`
	Files  int    `json:"files"`           // recordings of the whole list
	Shard  string `json:"shard,omitempty"` // "2/8"
}

// entry is one file of the list that was done.
type entry struct {
	File        string            `json:"file"`
	FileBytes   string            `json:"file_bytes,omitempty"` // as of a Row
	Folder      string            `json:"folder"`               // of its outputs
	SHA256      string            `json:"sha256"`               // of the file; empty when it could not be read
	Fingerprint string            `json:"fingerprint"`
	Rows        []Row             `json:"rows"`
	Outputs     map[string]string `json:"outputs"` // SHA-256 by path in the folder of results
}

// readJournal reads a journal. A last line that was cut by a kill is left out, and so is
// all behind a line that cannot be read: those recordings are done again.
func readJournal(root *os.Root, name string) (head header, entries map[string]entry, err error) {
	entries = map[string]entry{}
	text, err := root.ReadFile(name)
	if errors.Is(err, fs.ErrNotExist) {
		return head, entries, nil
	}
	if err != nil {
		return head, entries, err
	}
	lines := bufio.NewReader(bytes.NewReader(text))
	for first := true; ; first = false {
		line, err := lines.ReadBytes('\n')
		if err != nil { // the end, or a line without its end
			return head, entries, nil
		}
		if first {
			if json.Unmarshal(line, &head) != nil || head.Schema != journalSchema {
				return header{}, entries, fmt.Errorf("%s: is not a journal of this version; choose another folder, or take it away", name)
			}
			continue
		}
		var e entry
		if json.Unmarshal(line, &e) != nil || e.restoreNames() != nil {
			return head, entries, nil
		}
		entries[e.File] = e
	}
}

// restoreNames gives the entry and its rows the names that JSON could not carry.
func (e *entry) restoreNames() (err error) {
	if e.File, err = nameOf(e.File, e.FileBytes); err != nil {
		return err
	}
	for i := range e.Rows {
		if err := e.Rows[i].restoreNames(); err != nil {
			return err
		}
	}
	return nil
}

// journal appends entries as they come.
type journal struct{ file *os.File }

// openJournal starts a journal with what is kept of the one before, so that a cut line
// does not stand in the way of the next.
func openJournal(root *os.Root, name string, head header, kept []entry) (*journal, error) {
	if err := writeJournal(root, name, head, kept); err != nil {
		return nil, err
	}
	file, err := root.OpenFile(name, os.O_WRONLY|os.O_APPEND, 0o666)
	if err != nil {
		return nil, err
	}
	return &journal{file}, nil
}

// add appends one entry by one write, which a kill leaves whole or cut.
func (j *journal) add(e entry) error {
	line, err := json.Marshal(e)
	if err != nil {
		return err
	}
	_, err = j.file.Write(append(line, '\n'))
	return err
}

// writeJournal writes a whole journal.
func writeJournal(root *os.Root, name string, head header, entries []entry) error {
	var text bytes.Buffer
	lines := json.NewEncoder(&text)
	lines.SetEscapeHTML(false)
	if err := lines.Encode(head); err != nil {
		return err
	}
	for _, e := range entries {
		if err := lines.Encode(e); err != nil {
			return err
		}
	}
	return writeFile(root, name, text.Bytes())
}

// unchanged tells whether the entry still holds: the same file, settings and program, and
// all outputs there as they were written.
func (e entry) unchanged(root *os.Root, sum, fingerprint string) bool {
	if e.SHA256 != sum || e.Fingerprint != fingerprint || sum == "" {
		return false
	}
	for name, want := range e.Outputs {
		content, err := root.ReadFile(name)
		if err != nil || hexSum(content) != want {
			return false
		}
	}
	return true
}

func hexSum(content []byte) string {
	sum := sha256.Sum256(content)
	return hex.EncodeToString(sum[:])
}

// FileSum is the SHA-256 of a file; empty when it cannot be read, or is a pipe or a device.
func FileSum(path string) string {
	if info, err := os.Stat(path); err != nil || !info.Mode().IsRegular() {
		return ""
	}
	file, err := os.Open(path)
	if err != nil {
		return ""
	}
	defer file.Close()
	sum := sha256.New()
	if _, err := io.Copy(sum, file); err != nil {
		return ""
	}
	return hex.EncodeToString(sum.Sum(nil))
}
