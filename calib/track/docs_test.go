package track

import (
	"os"
	"slices"
	"strings"
	"testing"
)

const inputPage = "../../docs/input.md"

// The page on input names every kind of refusal and every unit of a position or a time,
// and each refusal of the page is shown by a sample but for those that no file alone shows.
func TestInputPage(t *testing.T) {
	text, err := os.ReadFile(inputPage)
	if err != nil {
		t.Fatal(err)
	}
	page := string(text)
	shown := map[string]bool{CodeLimit: true, CodeChanged: true, CodeFileKind: true, CodeSetting: true}
	for _, lines := range expectations(t) {
		if lines[0][2] == "refused" {
			shown[lines[0][3]] = true
		}
	}
	for _, code := range []string{CodeCell, CodeRow, CodeLayout, CodeColumns, CodeUnit, CodeTime, CodeRate, CodeFormat, CodeLimit, CodeCut, CodeEmpty, CodeChanged, CodeSetting, CodeFileKind} {
		if !strings.Contains(page, "\n| `"+code+"` |") {
			t.Errorf("%s does not name the refusal %q", inputPage, code)
		}
		if !shown[code] {
			t.Errorf("no sample shows the refusal %q", code)
		}
	}
	_, list, found := strings.Cut(page, "Units of positions:")
	list, _, ended := strings.Cut(strings.ReplaceAll(list, "\n", " "), "Capitals")
	if !found || !ended {
		t.Fatalf("%s lists no units", inputPage)
	}
	named := strings.FieldsFunc(list, func(r rune) bool { return strings.ContainsRune(" ,.", r) })
	for _, u := range units {
		if u.dim == frequency || u.dim == frames {
			continue
		}
		if !slices.Contains(named, u.name) {
			t.Errorf("%s does not name the unit %s", inputPage, u.name)
		}
	}
}
