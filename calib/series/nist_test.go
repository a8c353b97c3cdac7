package series

import (
	"errors"
	"math"
	"math/cmplx"
	"os"
	"regexp"
	"strconv"
	"strings"
	"testing"

	"gonum.org/v1/gonum/mat"
)

// Certified values and data: NIST/ITL Statistical Reference Datasets (StRD), linear and
// nonlinear regression, https://www.itl.nist.gov/div898/strd/; the files are as published.

// nistSet is one data set.
type nistSet struct {
	data      [][]float64 // rows: y, x...
	starts    [2][]float64
	certified []float64
	deviation []float64
	scatter   float64 // residual standard deviation
}

var (
	numberCell = regexp.MustCompile(`^[-+]?[0-9.]+(?:[EeDd][-+]?[0-9]+)?$`)
	parameter  = regexp.MustCompile(`^[Bb]\d+(?:\s|$)`)
)

func numbers(cells []string) (out []float64, ok bool) {
	for _, c := range cells {
		if !numberCell.MatchString(c) {
			return nil, false
		}
		v, err := strconv.ParseFloat(c, 64)
		if err != nil {
			return nil, false
		}
		out = append(out, v)
	}
	return out, len(out) > 0
}

func readNIST(t *testing.T, name string) nistSet {
	t.Helper()
	text, err := os.ReadFile("testdata/nist/" + name + ".dat")
	if err != nil {
		t.Fatal(err)
	}
	var set nistSet
	lines := strings.Split(string(text), "\n")
	for _, line := range lines[30:60] {
		cells := strings.Fields(line)
		if parameter.MatchString(strings.TrimSpace(line)) {
			cells = cells[1:]
			if len(cells) > 0 && cells[0] == "=" {
				cells = cells[1:]
			}
			if v, ok := numbers(cells); ok && len(v) == 2 {
				set.certified, set.deviation = append(set.certified, v[0]), append(set.deviation, v[1])
			} else if ok && len(v) == 4 {
				set.starts[0], set.starts[1] = append(set.starts[0], v[0]), append(set.starts[1], v[1])
				set.certified, set.deviation = append(set.certified, v[2]), append(set.deviation, v[3])
			}
		}
		if i := strings.Index(line, "Standard Deviation "); i >= 0 && math.IsNaN(set.scatter) || set.scatter == 0 && i >= 0 {
			if v, ok := numbers(strings.Fields(strings.TrimPrefix(line[i:], "Standard Deviation"))[:1]); ok {
				set.scatter = v[0]
			}
		}
	}
	for _, line := range lines[60:] {
		if v, ok := numbers(strings.Fields(line)); ok {
			set.data = append(set.data, v)
		}
	}
	return set
}

// digits is the number of digits in which two numbers agree (log relative error).
func digits(got, want float64) float64 {
	if got == want {
		return 16
	}
	if want == 0 {
		return -math.Log10(math.Abs(got))
	}
	return -math.Log10(math.Abs(got-want) / math.Abs(want))
}

func TestLineNIST(t *testing.T) {
	for _, tt := range []struct {
		name   string
		origin bool
		least  float64 // digits: float64 carries 15, Norris' abscissae cost 2 of them
	}{{"Norris", false, 11.5}, {"NoInt1", true, 13}, {"NoInt2", true, 13}} {
		set := readNIST(t, tt.name)
		var points []Point
		for _, row := range set.data {
			points = append(points, Point{Y: row[0], X: row[1]})
		}
		fit, err := Line(points, LineOptions{ThroughOrigin: tt.origin})
		if err != nil {
			t.Fatal(err)
		}
		got := []float64{fit.Intercept.Value, fit.Intercept.Statistical, fit.Slope.Value, fit.Slope.Statistical, fit.Scatter}
		want := []float64{set.certified[0], set.deviation[0], 0, 0, set.scatter}
		last := len(set.certified) - 1
		want[2], want[3] = set.certified[last], set.deviation[last]
		if tt.origin {
			want[0], want[1] = 0, 0
		}
		for i := range got {
			if d := digits(got[i], want[i]); d < tt.least {
				t.Errorf("%s: number %d = %.15g, want %.15g: %.1f digits, want %g", tt.name, i, got[i], want[i], d, tt.least)
			}
		}
	}
}

// The least-squares core on the harder sets; the digits asked for are what is left of 16 after
// the condition of the scaled design (Filip 1e10, Longley 1e5 without centring).
func TestLeastSquaresNIST(t *testing.T) {
	for _, tt := range []struct {
		name   string
		degree int // of a polynomial; 0: columns as given with a constant
		least  float64
	}{{"Pontius", 2, 11}, {"Wampler1", 5, 8}, {"Wampler2", 5, 11}, {"Wampler3", 5, 8}, {"Wampler4", 5, 7}, {"Wampler5", 5, 5}, {"Longley", 0, 9}, {"Filip", 10, 6}} {
		set := readNIST(t, tt.name)
		columns := tt.degree + 1
		if tt.degree == 0 {
			columns = len(set.data[0])
		}
		a, b := mat.NewDense(len(set.data), columns, nil), make([]float64, len(set.data))
		for i, row := range set.data {
			b[i] = row[0]
			for j := range columns {
				switch {
				case tt.degree > 0:
					a.Set(i, j, math.Pow(row[1], float64(j)))
				case j == 0:
					a.Set(i, j, 1)
				default:
					a.Set(i, j, row[j])
				}
			}
		}
		got, ok := leastSquares(a, b, 0)
		if !ok {
			t.Errorf("%s: refused", tt.name)
			continue
		}
		covariance, _ := inverseInformation(a)
		for j, want := range set.certified {
			if d := digits(got[j], want); d < tt.least {
				t.Errorf("%s: b%d = %.15g, want %.15g: %.1f digits, want %g", tt.name, j, got[j], want, d, tt.least)
			}
			if set.scatter == 0 {
				continue
			}
			if u := set.scatter * math.Sqrt(covariance.At(j, j)); digits(u, set.deviation[j]) < tt.least-1 {
				t.Errorf("%s: u(b%d) = %.15g, want %.15g", tt.name, j, u, set.deviation[j])
			}
		}
	}
}

// complexModel is a function whose derivatives come from a complex step, exact
// to rounding (Squire and Trapp, SIAM Rev. 40 (1998) 110).
type complexModel func(b []complex128, x float64) complex128

func (f complexModel) at(_ int, x float64, theta, gradient []float64) (value, slope float64, ok bool) {
	const step = 1e-100
	b := make([]complex128, len(theta))
	for j, v := range theta {
		b[j] = complex(v, 0)
	}
	value = real(f(b, x))
	for j, v := range theta {
		b[j] = complex(v, step)
		gradient[j] = imag(f(b, x)) / step
		b[j] = complex(v, 0)
		if !finite(gradient[j]) {
			return 0, 0, false
		}
	}
	return value, 0, true
}

func rational(b []complex128, x float64, top int) complex128 {
	up, down := complex(0, 0), complex(1, 0)
	power := complex(1, 0)
	for j := range top {
		up += b[j] * power
		power *= complex(x, 0)
	}
	power = complex(x, 0)
	for j := top; j < len(b); j++ {
		down += b[j] * power
		power *= complex(x, 0)
	}
	return up / down
}

// arctangent keeps a tiny imaginary part, which cmplx.Atan loses.
func arctangent(z complex128) complex128 {
	return complex(math.Atan(real(z)), imag(z)/(1+real(z)*real(z)))
}

var nonlinear = map[string]complexModel{
	"Misra1a": func(b []complex128, x float64) complex128 { return b[0] * (1 - cmplx.Exp(-b[1]*complex(x, 0))) },
	"BoxBOD":  func(b []complex128, x float64) complex128 { return b[0] * (1 - cmplx.Exp(-b[1]*complex(x, 0))) },
	"Misra1b": func(b []complex128, x float64) complex128 {
		d := 1 + b[1]*complex(x/2, 0)
		return b[0] * (1 - 1/(d*d))
	},
	"Chwirut2": func(b []complex128, x float64) complex128 {
		return cmplx.Exp(-b[0]*complex(x, 0)) / (b[1] + b[2]*complex(x, 0))
	},
	"DanWood": func(b []complex128, x float64) complex128 {
		return b[0] * cmplx.Exp(b[1]*complex(math.Log(x), 0))
	},
	"Kirby2":  func(b []complex128, x float64) complex128 { return rational(b, x, 3) },
	"Thurber": func(b []complex128, x float64) complex128 { return rational(b, x, 4) },
	"Hahn1":   func(b []complex128, x float64) complex128 { return rational(b, x, 4) },
	"MGH09": func(b []complex128, x float64) complex128 {
		z := complex(x, 0)
		return b[0] * (z*z + z*b[1]) / (z*z + z*b[2] + b[3])
	},
	"Rat42": func(b []complex128, x float64) complex128 { return b[0] / (1 + cmplx.Exp(b[1]-b[2]*complex(x, 0))) },
	"Rat43": func(b []complex128, x float64) complex128 {
		return b[0] * cmplx.Exp(-cmplx.Log(1+cmplx.Exp(b[1]-b[2]*complex(x, 0)))/b[3])
	},
	"Eckerle4": func(b []complex128, x float64) complex128 {
		z := (complex(x, 0) - b[2]) / b[1]
		return b[0] / b[1] * cmplx.Exp(-0.5*z*z)
	},
	"Roszman1": func(b []complex128, x float64) complex128 {
		return b[0] - b[1]*complex(x, 0) - arctangent(b[2]/(complex(x, 0)-b[3]))/math.Pi
	},
	"MGH10": func(b []complex128, x float64) complex128 { return b[0] * cmplx.Exp(b[1]/(complex(x, 0)+b[2])) },
	"Bennett5": func(b []complex128, x float64) complex128 {
		return b[0] * cmplx.Exp(-cmplx.Log(b[1]+complex(x, 0))/b[2])
	},
}

// From either start of NIST the solver gives 5 digits or more, or says that it reached no
// minimum; it never gives a wrong number. At most these five starts may end without one.
func TestFitCurveNIST(t *testing.T) {
	unconverged := 0
	for name, model := range nonlinear {
		set := readNIST(t, name)
		var points []Point
		for _, row := range set.data {
			points = append(points, Point{Y: row[0], X: row[1]})
		}
		for k, start := range set.starts {
			s, err := fitCurve(model, points, start)
			if err != nil {
				if !errors.Is(err, ErrNotConverged) && !errors.Is(err, ErrNotIdentifiable) {
					t.Errorf("%s from start %d: %v", name, k+1, err)
				}
				unconverged++
				t.Logf("%s from start %d: %v", name, k+1, err)
				continue
			}
			scatter := math.Sqrt(s.chiSquare / float64(len(points)-len(start)))
			for j, want := range set.certified {
				if d := digits(s.theta[j], want); d < 5 {
					t.Errorf("%s from start %d: b%d = %.11g, want %.11g: %.1f digits", name, k+1, j+1, s.theta[j], want, d)
				}
				if u := scatter * math.Sqrt(s.covariance.At(j, j)); digits(u, set.deviation[j]) < 4 {
					t.Errorf("%s from start %d: u(b%d) = %.11g, want %.11g", name, k+1, j+1, u, set.deviation[j])
				}
			}
		}
	}
	if unconverged > 6 {
		t.Errorf("%d of %d starts ended without a minimum, want at most 6", unconverged, 2*len(nonlinear))
	}
}
