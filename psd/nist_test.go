package psd

import (
	"bufio"
	"math"
	"os"
	"path/filepath"
	"regexp"
	"strconv"
	"strings"
	"testing"

	"beadwell/calib/transform"
)

// certified is a univariate set of the NIST Statistical Reference Datasets.
type certified struct {
	mean, deviation, lag1 float64
	values                []float64
}

var certifiedLine = regexp.MustCompile(`(Mean|Standard Deviation|Autocorrelation Coefficient).*:\s+(-?[0-9.]+)`)

func readCertified(t *testing.T, name string) certified {
	t.Helper()
	file, err := os.Open(filepath.Join("testdata", "nist", name))
	if err != nil {
		t.Fatal(err)
	}
	defer file.Close()
	c := certified{mean: math.NaN(), deviation: math.NaN(), lag1: math.NaN()}
	data := false
	for scan := bufio.NewScanner(file); scan.Scan(); {
		line := strings.TrimSpace(scan.Text())
		if data {
			if v, err := strconv.ParseFloat(line, 64); err == nil {
				c.values = append(c.values, v)
			}
			continue
		}
		data = strings.HasPrefix(line, "Data: Y")
		if m := certifiedLine.FindStringSubmatch(line); m != nil {
			v, err := strconv.ParseFloat(m[2], 64)
			if err != nil {
				t.Fatal(err)
			}
			*map[string]*float64{"Mean": &c.mean, "Standard Deviation": &c.deviation, "Autocorrelation Coefficient": &c.lag1}[m[1]] = v
		}
	}
	return c
}

// digits is the number of correct decimal digits, at most the 15 that are certified.
func digits(got, want float64) float64 {
	if got == want {
		return 15
	}
	return math.Min(15, -math.Log10(math.Abs(got-want)/math.Abs(want)))
}

// Mean, standard deviation and lag-1 autocorrelation of the certified sets through the
// functions that every record goes through: the removal of mean and line, the mean square, the sums of
// products. What the line took is added back: it is orthogonal to the rest. The values of
// NumAcc3 and NumAcc4 are not binary numbers: at 1e6 and 1e7 their rounding, 1e-16 of
// themselves, is 1e-9 and 1e-8 of the deviation of 0.1, which no algorithm can undo.
// Source: NIST StRD, www.itl.nist.gov/div898/strd.
func TestCertifiedMoments(t *testing.T) {
	for name, least := range map[string]float64{
		"Lottery.dat": 13, "Lew.dat": 13, "Mavro.dat": 13, "Michelso.dat": 13,
		"NumAcc1.dat": 13, "NumAcc2.dat": 13, "NumAcc3.dat": 9, "NumAcc4.dat": 8,
	} {
		c := readCertified(t, name)
		n := len(c.values)
		if n < 3 {
			t.Fatalf("%s: %d values", name, n)
		}
		r := &Record{Samples: n, Rate: 1, source: c.values, unit: 1}
		if err := r.removeLine(); err != nil {
			t.Fatal(err)
		}
		r.Restore()
		nn := float64(n)
		square := nn*meanSquare(r.X, n) + r.Slope*r.Slope*nn*(nn*nn-1)/12
		about := make([]float64, n)
		for i, x := range r.X {
			about[i] = x + r.Slope*(float64(i)-(nn-1)/2)
		}
		products := transform.Autocovariance(about, 1)
		for _, q := range []struct {
			what      string
			got, want float64
			least     float64
		}{
			{"mean", r.Mean, c.mean, 13},
			{"standard deviation", math.Sqrt(square / (nn - 1)), c.deviation, least},
			{"lag-1 autocorrelation", products[1] / products[0], c.lag1, least},
		} {
			if d := digits(q.got, q.want); !(d >= q.least) {
				t.Errorf("%s: %s = %.16g, want %.15g (NIST), %.1f digits, want %g", name, q.what, q.got, q.want, d, q.least)
			}
		}
	}
}
