package report

import (
	"bytes"
	"encoding/json"
	"math"
	"math/rand/v2"
	"reflect"
	"testing"

	"beadwell/calib"
	"beadwell/cmd/beadwell/internal/figure/specimen"
)

// asLibrary is what jsonOf has to give, by encoding/json alone.
func asLibrary(t *testing.T, value any, indented bool) []byte {
	t.Helper()
	var b bytes.Buffer
	e := json.NewEncoder(&b)
	e.SetEscapeHTML(false)
	if indented {
		e.SetIndent("", " ")
	}
	if err := e.Encode(value); err != nil {
		t.Fatal(err)
	}
	return escapeInvisible(bytes.TrimSuffix(b.Bytes(), []byte("\n")))
}

func encodesAsLibrary(t *testing.T, value any) {
	t.Helper()
	for _, indented := range []bool{true, false} {
		got, err := jsonOf(value, indented)
		if want := asLibrary(t, value, indented); err != nil || !bytes.Equal(got, want) {
			t.Fatalf("indented %v: error %v, or other bytes than encoding/json:\n%.2000s\n%.2000s", indented, err, got, want)
		}
	}
}

// Values of every type that is written, with every field filled at random and some left out, have the bytes of
// encoding/json: a new field of a kind that jsonOf does not know, or with a form of its own, is noticed here.
func TestEncodedAsEncodingJSON(t *testing.T) {
	random := rand.New(rand.NewPCG(3, 4))
	for range 200 {
		for _, into := range []any{new(calib.Result), new(calib.Plan), new(Set), new(LookSet), new(Force), new(Comparison)} {
			fill(reflect.ValueOf(into).Elem(), random, 0)
			encodesAsLibrary(t, into)
		}
	}
	encodesAsLibrary(t, storable(specimen.Result()))
}

// Kinds that no result has today are left to encoding/json, or written as it does.
func TestEncodedOtherKinds(t *testing.T) {
	type inner struct{ A int }
	type embedding struct {
		inner
		B int
	}
	type wide struct {
		M     map[string]any `json:"m"`
		Bytes []byte
		U     uint8
		F     float64
		Nil   *int
		Any   any
		Out   int    `json:"-"`
		Zero  string `json:",omitempty"`
		Text  int    `json:"text,string"`
		low   int
	}
	one := 1
	for _, value := range []any{nil, 1.5, "a\"b", "\u2028\u202e\x01é\xff<&>", []any{1, "x", nil, &one}, map[string]int{"b": 1, "a": 2}, embedding{inner{1}, 2},
		wide{M: map[string]any{"k": []int{1, 2}, "z": struct{}{}}, Bytes: []byte("abc"), U: 3, F: 1e-9, Any: wide{low: 1}}, [0]int{}, []string{}, [][]string{{}, nil, {"x"}}, struct{}{}} {
		encodesAsLibrary(t, value)
		encodesAsLibrary(t, []any{[]any{value}})
	}
	if _, err := jsonOf(func() {}, true); err == nil {
		t.Error("a function is written as JSON")
	}
}

// fill gives every field a value, or leaves it empty now and then.
func fill(v reflect.Value, random *rand.Rand, depth int) {
	if random.IntN(6) == 0 && v.Kind() != reflect.Struct {
		return
	}
	switch v.Kind() {
	case reflect.Pointer:
		if depth < 8 {
			v.Set(reflect.New(v.Type().Elem()))
			fill(v.Elem(), random, depth+1)
		}
	case reflect.Struct:
		for i := range v.NumField() {
			if v.Type().Field(i).IsExported() {
				fill(v.Field(i), random, depth+1)
			}
		}
	case reflect.Slice:
		if depth < 8 {
			v.Set(reflect.MakeSlice(v.Type(), random.IntN(3), 3))
			fillAll(v, random, depth)
		}
	case reflect.Array:
		fillAll(v, random, depth)
	case reflect.String:
		texts := []string{"plain", "pN/um", "µm", "a<b>&c", "tab\t", "\x1b[31m", "\u202ereversed", "\xff\xfe", `quo"te\`, "\u2028", "😀"}
		v.SetString(texts[random.IntN(len(texts))])
	case reflect.Bool:
		v.SetBool(true)
	case reflect.Int, reflect.Int64:
		v.SetInt(random.Int64N(2000) - 1000)
	case reflect.Float64:
		value := random.NormFloat64() * math.Pow(10, 40*random.Float64()-20)
		if v.Type() == floatType && random.IntN(5) == 0 {
			value = math.NaN()
		}
		v.SetFloat(value)
	}
}

func fillAll(v reflect.Value, random *rand.Rand, depth int) {
	for i := range v.Len() {
		fill(v.Index(i), random, depth+1)
	}
}
