package track

import (
	"bytes"
	"context"
	"crypto/sha256"
	"encoding/hex"
	"io"
	"strings"
	"testing"
	"testing/iotest"

	"github.com/klauspost/compress/gzip"
)

// The hash is that of the bytes of the file where the reader changes them in its
// buffers: line ends, padding, a last line without an end; and behind a decompressor.
func TestHashIsOfTheFile(t *testing.T) {
	text := ordinary(60_000)
	var small bytes.Buffer
	z := gzip.NewWriter(&small)
	if _, err := io.WriteString(z, text); err != nil || z.Close() != nil {
		t.Fatal(err)
	}
	at := strings.Index(text[2<<20:], "\n") + 2<<20
	for name, data := range map[string]string{
		"plain": text, "carriage returns": strings.ReplaceAll(text, "\n", "\r"), "late returns": text[:at] + strings.ReplaceAll(text[at:], "\n", "\r"),
		"pairs and more": strings.ReplaceAll(text, "5\n", "5\r\r\n"), "padding": text + "\x1a" + strings.Repeat("\x00", 600_000),
		"no last end": strings.TrimSuffix(text, "\n"), "gzip": small.String(),
	} {
		sum := sha256.Sum256([]byte(data))
		for _, r := range []io.Reader{strings.NewReader(data), iotest.HalfReader(strings.NewReader(data))} {
			list, err := Read(context.Background(), r, Options{Workers: 3})
			if err != nil {
				t.Fatalf("%s: %v", name, err)
			}
			if rec := list[0]; rec.SHA256 != hex.EncodeToString(sum[:]) || rec.Size != int64(len(data)) || rec.Samples != 60_000 {
				t.Errorf("%s: hash %s, %d bytes, %d samples, want %x, %d, 60000", name, rec.SHA256, rec.Size, rec.Samples, sum, len(data))
			}
		}
	}
}
