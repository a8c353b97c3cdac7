package simulate

import (
	"bytes"
	"errors"
	"math"
	"strings"
	"testing"
)

func TestWriteCSVDialects(t *testing.T) {
	columns := []Column{
		{Name: "t", Unit: Second, Values: []float64{0, 0.001, 0.002}, Decimals: 3},
		{Name: "x", Unit: Nanometre, Values: []float64{-12.3456789e-9, 0, 1.5e-9}},
		{Name: "y", Unit: Unit{"V", 1e6}, Values: []float64{1e-6, math.NaN(), -1e-7}},
	}
	for _, row := range []struct {
		name   string
		format CSV
		want   string
	}{
		{"zero value", CSV{}, "t (s),x (nm),y (V)\n0.000,-12.34568,1.000000\n0.001,0.00000,\n0.002,1.50000,-0.100000\n"},
		{"decimal comma", CSV{Delimiter: ';', DecimalComma: true, Header: Brackets, Digits: 4, CRLF: true, ByteOrder: true},
			"\ufefft [s];x [nm];y [V]\r\n0,000;-12,35;1,000\r\n0,001;0,00;\r\n0,002;1,50;-0,100\r\n"},
		{"underscores", CSV{Delimiter: '\t', Header: Underscore, Digits: 3, Comments: []string{"simulated", "rate 1 kHz"}},
			"# simulated\n# rate 1 kHz\nt_s\tx_nm\ty_V\n0.000\t-12.3\t1.00\n0.001\t0.0\t\n0.002\t1.5\t-0.10\n"},
		{"bare", CSV{Delimiter: ' ', Header: NoHeader, Digits: 2}, "0.000 -12 1.0\n0.001 0 \n0.002 2 -0.1\n"},
		{"names", CSV{Header: NamesOnly, Digits: 2}, "t,x,y\n0.000,-12,1.0\n0.001,0,\n0.002,2,-0.1\n"},
	} {
		var out bytes.Buffer
		if err := WriteCSV(&out, columns, row.format); err != nil || out.String() != row.want {
			t.Errorf("%s: WriteCSV = %v, wrote\n%q, want\n%q", row.name, err, out.String(), row.want)
		}
	}
}

// No value shows more than the asked digits, also where rounding carries: 9.9999999 has
// one digit before the point and would need two.
func TestWriteCSVDigits(t *testing.T) {
	for _, row := range []struct {
		value  float64
		digits int
		want   string
	}{
		{9.9999999, 7, "10.00000"}, {0.99996, 4, "1.000"}, {0.012345678, 3, "0.0123"}, {123456789, 5, "123456789"}, {0, 7, "0"}, {99.94, 3, "99.9"},
	} {
		var out bytes.Buffer
		if err := WriteCSV(&out, []Column{{Unit: Metre, Values: []float64{row.value}}}, CSV{Header: NoHeader, Digits: row.digits}); err != nil {
			t.Fatal(err)
		}
		if got := strings.TrimSpace(out.String()); got != row.want {
			t.Errorf("%v with %d digits = %s, want %s", row.value, row.digits, got, row.want)
		}
	}
}

// Columns that share their decimals take those of the largest.
func TestDecimalsOfSeveral(t *testing.T) {
	small, large := Column{Unit: Nanometre, Values: []float64{1e-9}}, Column{Unit: Nanometre, Values: []float64{math.NaN(), 123e-9}}
	if got := Decimals(5, small, large); got != 2 {
		t.Errorf("Decimals(5, 1 nm, 123 nm) = %d, want 2", got)
	}
}

func TestTimeColumnDecimals(t *testing.T) {
	for _, row := range []struct {
		rate float64
		unit Unit
		want int
	}{{1000, Second, 3}, {50000, Second, 5}, {65536, Second, 9}, {2000, Millisecond, 1}, {30, Second, 9}, {1, Second, 1}} {
		if got := TimeColumn(Recording{}, row.unit, row.rate).Decimals; got != row.want {
			t.Errorf("%v Hz in %s: %d decimals, want %d", row.rate, row.unit.Symbol, got, row.want)
		}
	}
}

type full struct{}

func (full) Write([]byte) (int, error) { return 0, errors.New("no space left") }

func TestWriteCSVErrors(t *testing.T) {
	good := []Column{{Name: "x", Unit: Metre, Values: []float64{1}}}
	var out bytes.Buffer
	for name, err := range map[string]error{
		"no columns":   WriteCSV(&out, nil, CSV{}),
		"digits":       WriteCSV(&out, good, CSV{Digits: 8}),
		"comma twice":  WriteCSV(&out, good, CSV{DecimalComma: true}),
		"header":       WriteCSV(&out, good, CSV{Header: 9}),
		"lengths":      WriteCSV(&out, append(good, Column{Name: "y", Unit: Metre}), CSV{}),
		"unit":         WriteCSV(&out, []Column{{Name: "x", Values: []float64{1}}}, CSV{}),
		"writer fails": WriteCSV(full{}, good, CSV{}),
	} {
		if err == nil {
			t.Errorf("%s: WriteCSV = nil, want an error", name)
		}
	}
	if out.Len() > 0 {
		t.Errorf("refused, yet wrote %q", out.String())
	}
}
