package report

import (
	"fmt"
	"go/ast"
	"os"
	"reflect"
	"strconv"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
)

const outputPage = "../../../../docs/output.md"

// docs/output.md names every key of the JSON and every column of the CSV: the
// tables in it are made from the types, between marks, with -update.
func TestOutputPageIsCurrent(t *testing.T) {
	page, err := os.ReadFile(outputPage)
	if err != nil {
		t.Fatal(err)
	}
	want := string(page)
	for mark, table := range map[string]string{
		"keys": keyTables(newGenerator(t)), "columns": columnTable(resultColumns()), "drag": keyTables(generatorOf(t, "drag.go")),
		"plan": keyTables(newPlanGenerator(t)), "plan columns": columnTable(planColumns),
		"force": keyTables(newForceGenerator(t)), "force columns": columnTable(forceColumns)} {
		begin, end := "<!-- "+mark+": made by go test -update -->\n", "<!-- end of "+mark+" -->"
		before, rest, found := strings.Cut(want, begin)
		_, after, closed := strings.Cut(rest, end)
		if !found || !closed {
			t.Fatalf("%s has no place for the %s", outputPage, mark)
		}
		want = before + begin + "\n" + table + "\n" + end + after
	}
	if *update {
		if err := os.WriteFile(outputPage, []byte(want), 0o644); err != nil {
			t.Fatal(err)
		}
		return
	}
	if diff := cmp.Diff(want, string(page)); diff != "" {
		t.Errorf("%s is not what the types say; run go test ./cmd/beadwell/internal/report -update (-want +got):\n%s", outputPage, diff)
	}
}

// resultColumns are the columns of CSV.
func resultColumns() [][2]string {
	var all [][2]string
	for _, c := range columns {
		all = append(all, [2]string{c.name, c.meaning})
	}
	return all
}

// No key is without its meaning.
func TestEveryKeyHasAMeaning(t *testing.T) {
	for _, g := range []*generator{newGenerator(t), generatorOf(t, "drag.go"), newPlanGenerator(t), newForceGenerator(t)} {
		for _, name := range g.order {
			for _, field := range g.structs[name].Fields.List {
				if oneLine(field.Comment.Text()) == "" {
					t.Errorf("%s.%s has no comment that says what it is", name, field.Names[0])
				}
			}
		}
	}
}

// columnTable lists columns, each with its meaning.
func columnTable(columns [][2]string) string {
	var b strings.Builder
	b.WriteString("| column | meaning |\n| --- | --- |\n")
	for _, c := range columns {
		fmt.Fprintf(&b, "| `%s` | %s |\n", c[0], c[1])
	}
	return b.String()
}

// keyTables describes each type of the result in a table.
func keyTables(g *generator) string {
	var b strings.Builder
	for _, name := range g.order {
		fmt.Fprintf(&b, "### %s\n\n%s\n\n| key | type | meaning |\n| --- | --- | --- |\n", name, g.docs[name])
		for _, field := range g.structs[name].Fields.List {
			tag, _ := strconv.Unquote(field.Tag.Value)
			key, options, _ := strings.Cut(reflect.StructTag(tag).Get("json"), ",")
			kind := typeName(field.Type)
			if options == "omitempty" {
				kind += ", optional"
			}
			fmt.Fprintf(&b, "| `%s` | %s | %s |\n", key, kind, strings.ReplaceAll(oneLine(field.Comment.Text()), "|", "\\|"))
		}
		b.WriteString("\n")
	}
	return strings.TrimSuffix(b.String(), "\n")
}

func typeName(expression ast.Expr) string {
	switch e := expression.(type) {
	case *ast.Ident:
		switch e.Name {
		case "Float":
			return "number or null"
		case "int", "int64":
			return "integer"
		case "bool":
			return "true or false"
		case "string":
			return "text"
		}
		return typeLink(e.Name)
	case *ast.SelectorExpr: // calib.Float
		return typeName(e.Sel)
	case *ast.StarExpr:
		return typeName(e.X)
	case *ast.ArrayType:
		if length, ok := e.Len.(*ast.BasicLit); ok {
			return "list of " + length.Value + ": " + typeName(e.Elt)
		}
		return "list of " + typeName(e.Elt)
	case *ast.MapType:
		return "object of " + typeName(e.Value)
	}
	return "?"
}

func typeLink(name string) string { return "[" + name + "](#" + strings.ToLower(name) + ")" }
