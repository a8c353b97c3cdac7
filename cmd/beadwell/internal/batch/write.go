package batch

import (
	"errors"
	"fmt"
	"io/fs"
	"math/rand/v2"
	"os"
	"path"
	"strings"
)

// partSuffix ends the temporary name of a file: a dot, its name, a dot, a random number, and this.
const partSuffix = ".part"

// writeFile writes under a random name in the file's folder and renames: a reader, or a kill, meets the old
// file or the new one. What a killed run left of the same file is removed. Nothing is forced to the disk, which would cost milliseconds for
// each of thousands of files: the journal holds the SHA-256 of each, and what a failing
// machine lost is done again.
func writeFile(root *os.Root, name string, content []byte) error {
	if info, err := root.Lstat(name); err == nil && !info.Mode().IsRegular() {
		return fmt.Errorf("%s: is no plain file; move it away, or choose another folder", name)
	}
	if err := removeParts(root, name); err != nil {
		return err
	}
	part := path.Join(path.Dir(name), fmt.Sprintf(".%s.%016x%s", path.Base(name), rand.Uint64(), partSuffix))
	file, err := root.OpenFile(part, os.O_WRONLY|os.O_CREATE|os.O_EXCL, 0o666)
	if err != nil {
		return err
	}
	_, err = file.Write(content)
	if err = errors.Join(err, file.Close()); err == nil {
		err = root.Rename(part, name)
	}
	if err != nil {
		return errors.Join(err, root.Remove(part))
	}
	return nil
}

// removeParts removes the temporary files that a killed run left of a file.
func removeParts(root *os.Root, name string) error {
	folder, err := root.Open(path.Dir(name))
	if err != nil {
		return err
	}
	defer folder.Close()
	names, err := folder.Readdirnames(-1)
	if err != nil {
		return err
	}
	for _, n := range names {
		if !strings.HasPrefix(n, "."+path.Base(name)+".") || !strings.HasSuffix(n, partSuffix) {
			continue
		}
		if err := root.Remove(path.Join(path.Dir(name), n)); err != nil && !errors.Is(err, fs.ErrNotExist) {
			return err
		}
	}
	return nil
}

// Output is one file of a recording.
type Output struct {
	Name    string
	Content []byte
}

// writeOutputs writes the files of a recording into its folder, and gives their sums.
func writeOutputs(root *os.Root, folder string, outputs []Output, sums map[string]string) error {
	if err := root.Mkdir(folder, 0o777); err != nil && !errors.Is(err, fs.ErrExist) {
		return err
	}
	for _, o := range outputs {
		name := path.Join(folder, o.Name)
		if err := writeFile(root, name, o.Content); err != nil {
			return err
		}
		sums[name] = hexSum(o.Content)
	}
	return nil
}
