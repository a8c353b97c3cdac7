package session

import (
	"os"
	"strings"
	"testing"
	"unicode/utf16"

	"github.com/google/go-cmp/cmp"

	"beadwell/calib/bound"
)

const listText = `file,role,height,power,noise.x,recording.noise.y,note
"p 1.csv",trapped,8.0(5) um,20 mW,4(1) nm,5 nm,"first, of all"
day2/p2.csv,free,far,0,,,
p3.csv#2,,,,,,
`

func TestReadTracks(t *testing.T) {
	tracks, err := ReadTracks("folder/tracks.csv", []byte(listText))
	if err != nil {
		t.Fatal(err)
	}
	var files []string
	for _, row := range tracks.Rows {
		files = append(files, row.File)
	}
	if diff := cmp.Diff([]string{"p 1.csv", "day2/p2.csv", "p3.csv#2"}, files); diff != "" {
		t.Errorf("files (-want +got):\n%s", diff)
	}
	row, ok := tracks.Row("./p 1.csv", "")
	if !ok || row.Line != 2 || row.Note != "first, of all" {
		t.Errorf("Row(p 1.csv) = %+v, %v", row, ok)
	}
	for key, want := range map[string]string{"role|": "2:11", "chamber.height|": "2:19", "recording.noise|x": "2:35", "recording.noise|y": "2:43"} {
		name, axis, _ := strings.Cut(key, "|")
		got, _ := row.Settings.From(FromTracks, name, axis)
		if got.Where != "tracks.csv:"+want {
			t.Errorf("%s stands at %q, want tracks.csv:%s", key, got.Where, want)
		}
	}
	if second := tracks.Rows[1]; len(second.Settings.All()) != 3 {
		t.Errorf("empty cells are settings: %+v", second.Settings.All())
	}
	if third := tracks.Rows[2]; third.Line != 4 || len(third.Settings.All()) != 0 {
		t.Errorf("third row = %+v", third)
	}
	if _, ok := tracks.Row("p9.csv", ""); ok {
		t.Error("a recording that is not listed has a row")
	}
	var none *Tracks
	if _, ok := none.Row("p1.csv", ""); ok {
		t.Error("a nil list has a row")
	}
}

func TestTracksByBead(t *testing.T) {
	tracks, err := ReadTracks("tracks.csv", []byte("file,bead,height\na.csv,,1 um\na.csv,2,2 um\n"))
	if err != nil {
		t.Fatal(err)
	}
	for bead, want := range map[string]int{"": 2, "1": 2, "2": 3} {
		if row, ok := tracks.Row("a.csv", bead); !ok || row.Line != want {
			t.Errorf("row of bead %q is line %d, want %d", bead, row.Line, want)
		}
	}
}

// The same list in the forms that spreadsheets write.
func TestTracksDialects(t *testing.T) {
	wide := func(order func(uint16) [2]byte, text string) []byte {
		var out []byte
		for _, unit := range utf16.Encode([]rune("\ufeff" + text)) {
			pair := order(unit)
			out = append(out, pair[0], pair[1])
		}
		return out
	}
	little := func(u uint16) [2]byte { return [2]byte{byte(u), byte(u >> 8)} }
	big := func(u uint16) [2]byte { return [2]byte{byte(u >> 8), byte(u)} }
	dialects := map[string][]byte{
		"commas":              []byte("file,height\na.csv,8.5(5) um\n"),
		"byte order mark":     []byte("\ufefffile,height\na.csv,8.5(5) um\n"),
		"CRLF, no final line": []byte("file,height\r\na.csv,8.5(5) um"),
		"CR":                  []byte("file,height\ra.csv,8.5(5) um\r"),
		"semicolons":          []byte("file;height\na.csv;8.5(5) um\n"),
		"decimal commas":      []byte("file;height\na.csv;8,5(5) um\n"),
		"tabs":                []byte("file\theight\na.csv\t8,5(5) um\n"),
		"separator line":      []byte("sep=;\r\nfile;height\r\na.csv;8,5(5) um\r\n"),
		"quoted separator":    []byte("\"sep=,\"\nfile,height\na.csv,\"8.5(5) um\"\n"),
		"UTF-16 little":       wide(little, "file\theight\r\na.csv\t8,5(5) \u00b5m\r\n"),
		"UTF-16 big":          wide(big, "file\theight\r\na.csv\t8,5(5) \u00b5m\r\n"),
		"unit in header":      []byte("File,Height (um)\na.csv,8.5(5)\n"),
		"unit in brackets":    []byte("file,height [µm]\na.csv,8.5 +- 0.5\n"),
		"unit in both":        []byte("file,height (nm)\na.csv,8.5(5) um\n"),
		"trailing cells":      []byte("file,height,,\n,,,\na.csv,8.5(5) um,,\n,,,\n"),
		"spaces":              []byte("file , height\na.csv ,  \"8.5(5) um\"\n"),
	}
	for name, data := range dialects {
		tracks, err := ReadTracks("tracks.csv", data)
		if err != nil {
			t.Errorf("%s: %v", name, err)
			continue
		}
		row, ok := tracks.Row("a.csv", "")
		height, _ := row.Settings.Lookup("chamber.height", "")
		if !ok || len(tracks.Rows) != 1 || height.Value.SI != 8.5e-6 || height.Value.U != 0.5e-6 {
			t.Errorf("%s: %+v", name, height)
		}
	}
	for _, cells := range []string{"25", "25 %", "25(0) %"} {
		tracks, err := ReadTracks("tracks.csv", []byte("file,alpha (%)\na.csv,"+cells+"\n"))
		if err != nil {
			t.Errorf("alpha in %%: %v", err)
			continue
		}
		if alpha, _ := tracks.Rows[0].Settings.Lookup("detector.alpha", ""); alpha.Value.SI != 0.25 {
			t.Errorf("alpha of %q = %v, want 0.25", cells, alpha.Value.SI)
		}
	}
	tracks, err := ReadTracks("tracks.csv", []byte("sep=;\nfile;height\n\na.csv;1 um\n"))
	if err != nil || tracks.Rows[0].Line != 4 {
		t.Errorf("lines are counted wrong behind sep= and an empty line: %+v, %v", tracks, err)
	}
}

func TestTracksErrors(t *testing.T) {
	tests := []struct{ text, want string }{
		{"", "t.csv: is empty"},
		{"\n\n", "t.csv: is empty"},
		{"name,height\na.csv,1 um", "t.csv:1:1: \"name\" is neither file, note nor a setting"},
		{"role,height\nfree,1 um", "t.csv:1:1: the header has no column file"},
		{"file,hieght\na.csv,1 um", "t.csv:1:6: \"hieght\" is neither file, note nor a setting\n  hint: did you mean height?"},
		{"file,density\na.csv,1 g/cm3", "t.csv:1:6: \"density\" may mean more than one setting\n  hint: write bead.density or medium.density"},
		{"file" + strings.Repeat(",", 200), "t.csv:1:1: the header has more than 200 columns"},
		{"file,height.x\na.csv,1 um", "holds for the whole recording"},
		{"file,height,chamber.height\na.csv,1 um,1 um", "t.csv:1:13: \"chamber.height\" is a second column for the same"},
		{"file,file\na.csv,b.csv", "t.csv:1:6: \"file\" is a second column"},
		{"file,height (s)\na.csv,1", "t.csv:1:6: \"height\" has the unit \"s\", which chamber.height cannot have"},
		{"file,role (um)\na.csv,free", "cannot have"},
		{"file,height\na.csv,1", "t.csv:2:7: chamber.height \"1\" has no unit"},
		{"file,height\na.csv,-1 um", "t.csv:2:7: chamber.height \"-1 um\" is negative"},
		{"file,height\na.csv", "t.csv:2:1: 1 cell in this row, but 2 columns in the header"},
		{"file\na.csv,x", "t.csv:2:1: 2 cells in this row, but 1 column in the header"},
		{"file,height\n,1 um", "t.csv:2:1: file is empty"},
		{"file,\na.csv,x", "t.csv:2:7: \"x\" stands in a column without a name"},
		{"file\na.csv\n./a.csv", "t.csv:3:1: file \"a.csv\" has a row already, in line 2"},
		{"file\n/etc/passwd", "t.csv:2:1: file \"/etc/passwd\" leads out of the folder"},
		{"file\n../a.csv", "leads out of the folder"},
		{"file\nday/../../a.csv", "leads out of the folder"},
		{"file\nday/../a.csv", "leads out of the folder"},
		{"file\n./", "t.csv:2:1: file \"./\" is a folder"},
		{"file\nday\\a.csv", "has a backslash"},
		{"file\n\"a\nb.csv\"", "has a line break"},
		{"file,height\n\"a.csv,1 um\n", "t.csv:2:"},
		{"file,height\na.csv,\"1 um\nb.csv,2 um\n", "t.csv:2:1: a quotation mark is not closed"},
		{"file;power\na.csv;2,000 mW", "t.csv:2:7: laser.power \"2,000 mW\" may have a decimal comma or a mark between thousands"},
		{"file,power\na.csv,\"2,000 mW\"", "has a comma in its number"},
		{"file,noise,background\na.csv,1 nm,b.csv", "recording.background \"b.csv\" is given beside recording.noise"},
		{"file,height\na\x00.csv,1 um", "t.csv: is not a text in UTF-8"},
		{"file,height\na\xb5.csv,1 um", "t.csv: is not a text in UTF-8"},
	}
	for _, tt := range tests {
		tracks, err := ReadTracks("t.csv", []byte(tt.text))
		if err == nil || !strings.Contains(err.Error(), tt.want) || tracks != nil {
			t.Errorf("%q gave %v\nwant an error with %s", tt.text, err, tt.want)
			continue
		}
		if !strings.Contains(err.Error(), "\n  hint: ") {
			t.Errorf("%q: no hint in %v", tt.text, err)
		}
	}
}

func TestLoadTracksFile(t *testing.T) {
	path := t.TempDir() + "/" + TracksName
	if _, err := LoadTracks(path); err == nil {
		t.Error("LoadTracks of no file succeeded")
	}
	if err := os.WriteFile(path, []byte(listText), 0o600); err != nil {
		t.Fatal(err)
	}
	if tracks, err := LoadTracks(path); err != nil || len(tracks.Rows) != 3 {
		t.Errorf("LoadTracks = %+v, %v", tracks, err)
	}
}

func FuzzReadTracks(f *testing.F) {
	for _, seed := range []string{listText, "", "file\n", "sep=;\nfile;height\na;8,5 um", "file\t\"x", "\xff\xfef\x00", "file,columns\na,\"x=1,y=2\""} {
		f.Add([]byte(seed))
	}
	f.Fuzz(func(t *testing.T, data []byte) {
		if len(data) > bound.Input {
			return
		}
		var tracks *Tracks
		var err error
		bound.Effort(t, func() { tracks, err = ReadTracks("t.csv", data) })
		if (err == nil) == (tracks == nil) {
			t.Fatalf("ReadTracks gave %v and %v", tracks, err)
		}
		if err != nil {
			return
		}
		for _, row := range tracks.Rows {
			if row.File == "" || strings.HasPrefix(row.File, "/") || strings.HasPrefix(row.File, "../") || row.Line < 2 {
				t.Fatalf("row %+v", row)
			}
		}
	})
}
