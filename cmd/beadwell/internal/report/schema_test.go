package report

import (
	"bytes"
	"encoding/json"
	"flag"
	"go/ast"
	"go/parser"
	"go/token"
	"os"
	"path/filepath"
	"reflect"
	"slices"
	"strconv"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
	"github.com/santhosh-tekuri/jsonschema/v6"

	"beadwell/calib"
)

var update = flag.Bool("update", false, "write the golden files instead of comparing with them")

const (
	resultSource = "../../../../calib"
	docsSchema   = "../../../../docs/result.schema.json"
)

// object is a JSON object that keeps the order of its keys.
type object []member

type member struct {
	key   string
	value any
}

func (o object) MarshalJSON() ([]byte, error) {
	var b bytes.Buffer
	b.WriteByte('{')
	for i, m := range o {
		if i > 0 {
			b.WriteByte(',')
		}
		key, _ := json.Marshal(m.key)
		value, err := json.Marshal(m.value)
		if err != nil {
			return nil, err
		}
		b.Write(append(append(key, ':'), value...))
	}
	b.WriteByte('}')
	return b.Bytes(), nil
}

// generator makes a schema from the struct declarations and their comments.
type generator struct {
	structs map[string]*ast.StructType
	docs    map[string]string
	order   []string
}

// newGenerator reads the type calib.Result and the types that it is made of.
func newGenerator(t *testing.T) *generator {
	t.Helper()
	g := calibTypes(t)
	g.keep("Result")
	return g
}

// newPlanGenerator reads the type calib.Plan and what it is made of beyond the types of a result.
func newPlanGenerator(t *testing.T) *generator {
	t.Helper()
	g := calibTypes(t)
	g.keepBeside("Plan", newGenerator(t).order)
	return g
}

// newForceGenerator does the same for the type Force.
func newForceGenerator(t *testing.T) *generator {
	t.Helper()
	g := generatorOf(t, "force.go", filepath.Join(resultSource, "force_trace.go"))
	g.keepBeside("Force", newGenerator(t).order)
	return g
}

// keep drops the types that name does not hold.
func (g *generator) keep(name string) {
	used := map[string]bool{}
	g.reach(name, used)
	g.order = slices.DeleteFunc(g.order, func(name string) bool { return !used[name] })
}

// keepBeside does so too, and drops those that are described elsewhere.
func (g *generator) keepBeside(name string, elsewhere []string) {
	g.keep(name)
	g.order = slices.DeleteFunc(g.order, func(name string) bool { return slices.Contains(elsewhere, name) })
}

// calibTypes reads all types of package calib, those of result.go first.
func calibTypes(t *testing.T) *generator {
	t.Helper()
	paths, err := filepath.Glob(filepath.Join(resultSource, "*.go"))
	if err != nil {
		t.Fatal(err)
	}
	paths = slices.DeleteFunc(paths, func(path string) bool { return strings.HasSuffix(path, "_test.go") })
	first := filepath.Join(resultSource, "result.go")
	slices.SortStableFunc(paths, func(a, b string) int {
		return strings.Compare(strings.TrimPrefix(a, first), strings.TrimPrefix(b, first))
	})
	return generatorOf(t, paths...)
}

// reach marks a type and all that it holds.
func (g *generator) reach(name string, used map[string]bool) {
	if used[name] || g.structs[name] == nil {
		return
	}
	used[name] = true
	for _, field := range g.structs[name].Fields.List {
		ast.Inspect(field.Type, func(n ast.Node) bool {
			if selected, ok := n.(*ast.SelectorExpr); ok { // calib.Input
				n = selected.Sel
			}
			if id, ok := n.(*ast.Ident); ok {
				g.reach(id.Name, used)
			}
			return true
		})
	}
}

func generatorOf(t *testing.T, paths ...string) *generator {
	t.Helper()
	g := &generator{structs: map[string]*ast.StructType{}, docs: map[string]string{}}
	for _, path := range paths {
		file, err := parser.ParseFile(token.NewFileSet(), path, nil, parser.ParseComments)
		if err != nil {
			t.Fatal(err)
		}
		for _, declaration := range file.Decls {
			if general, ok := declaration.(*ast.GenDecl); ok {
				g.addStructs(general)
			}
		}
	}
	return g
}

func (g *generator) addStructs(general *ast.GenDecl) {
	for _, spec := range general.Specs {
		typeSpec, ok := spec.(*ast.TypeSpec)
		if !ok {
			continue
		}
		if s, ok := typeSpec.Type.(*ast.StructType); ok {
			g.structs[typeSpec.Name.Name] = s
			g.docs[typeSpec.Name.Name] = oneLine(general.Doc.Text())
			g.order = append(g.order, typeSpec.Name.Name)
		}
	}
}

func oneLine(text string) string { return strings.Join(strings.Fields(text), " ") }

func (g *generator) schema() object {
	definitions := object{}
	for _, name := range g.order {
		if name != "Result" {
			definitions = append(definitions, member{name, g.structSchema(name)})
		}
	}
	schema := object{
		{"$schema", "https://json-schema.org/draft/2020-12/schema"},
		{"$id", "urn:" + strings.ReplaceAll(calib.SchemaVersion, "/", ":")},
		{"title", "Result of beadwell"},
	}
	schema = append(schema, g.structSchema("Result")...)
	return append(schema, member{"$defs", definitions})
}

func (g *generator) structSchema(name string) object {
	properties, required := object{}, []string{}
	for _, field := range g.structs[name].Fields.List {
		tag, _ := strconv.Unquote(field.Tag.Value)
		key, options, _ := strings.Cut(reflect.StructTag(tag).Get("json"), ",")
		property := g.typeSchema(field.Type)
		if comment := oneLine(field.Comment.Text()); comment != "" {
			property = append(property, member{"description", comment})
		}
		if key == "schema" {
			property = append(property, member{"const", calib.SchemaVersion})
		}
		properties = append(properties, member{key, property})
		if options != "omitempty" {
			required = append(required, key)
		}
	}
	return object{{"description", g.docs[name]}, {"type", "object"}, {"required", required}, {"properties", properties}}
}

func (g *generator) typeSchema(expression ast.Expr) object {
	switch e := expression.(type) {
	case *ast.Ident:
		switch e.Name {
		case "string":
			return object{{"type", "string"}}
		case "int", "int64":
			return object{{"type", "integer"}}
		case "bool":
			return object{{"type", "boolean"}}
		case "Float":
			return object{{"type", []string{"number", "null"}}}
		}
		return object{{"$ref", "#/$defs/" + e.Name}}
	case *ast.StarExpr:
		return g.typeSchema(e.X)
	case *ast.ArrayType:
		list := object{{"type", "array"}, {"items", g.typeSchema(e.Elt)}}
		if length, ok := e.Len.(*ast.BasicLit); ok {
			n, _ := strconv.Atoi(length.Value)
			list = append(list, member{"minItems", n}, member{"maxItems", n})
		}
		return list
	case *ast.MapType:
		return object{{"type", "object"}, {"additionalProperties", g.typeSchema(e.Value)}}
	}
	panic("calib.Result holds a type that the schema generator does not know")
}

// The schema follows from the type: a change of the type shows here.
func TestSchemaIsCurrent(t *testing.T) {
	want, err := json.MarshalIndent(newGenerator(t).schema(), "", " ")
	if err != nil {
		t.Fatal(err)
	}
	want = append(want, '\n')
	for _, path := range []string{"result.schema.json", docsSchema} {
		if *update {
			if err := os.WriteFile(path, want, 0o644); err != nil {
				t.Fatal(err)
			}
		}
		got, err := os.ReadFile(path)
		if err != nil {
			t.Fatal(err)
		}
		if diff := cmp.Diff(string(want), string(got)); diff != "" {
			t.Errorf("%s is not what calib.Result says; run go test ./cmd/beadwell/internal/report -update (-want +got):\n%s", path, diff)
		}
	}
}

// compiled compiles the schema; strict forbids keys that it does not name.
func compiled(t *testing.T, strict bool) *jsonschema.Schema {
	t.Helper()
	source := Schema()
	if strict {
		source = bytes.ReplaceAll(source, []byte(`"properties":`), []byte(`"additionalProperties": false, "properties":`))
	}
	document, err := jsonschema.UnmarshalJSON(bytes.NewReader(source))
	if err != nil {
		t.Fatal(err)
	}
	c := jsonschema.NewCompiler()
	if err := c.AddResource("result.schema.json", document); err != nil {
		t.Fatal(err)
	}
	return c.MustCompile("result.schema.json")
}

func TestResultsValidate(t *testing.T) {
	for name, r := range map[string]*calib.Result{"full": storedSample(), "hostile": hostileSample(), "empty": {Schema: calib.SchemaVersion}} {
		var b bytes.Buffer
		if err := JSON(&b, r); err != nil {
			t.Fatalf("JSON(%s) = %v", name, err)
		}
		document, err := jsonschema.UnmarshalJSON(&b)
		if err != nil {
			t.Fatal(err)
		}
		if err := compiled(t, true).Validate(document); err != nil {
			t.Errorf("result %s does not fit its schema: %v", name, err)
		}
	}
}
