package psd

import (
	"math"
	"slices"

	"gonum.org/v1/gonum/stat/distuv"

	"beadwell/calib/relaxation"
)

// Gathered is what is kept of a record that is too long for the memory: it was cut into parts of equal
// length, each of which was prepared by itself. What is estimated from it treats the parts as independent
// records of one process. The zero value is empty.
type Gathered struct {
	Parts  int
	Length int       // samples of a part, a good length
	Power  []float64 // sum of the periodograms of the parts [m2]
	Square float64   // sum of their mean squares [m2]
	Mean   float64   // sum of their means [m]
	Slope  float64   // sum of their slopes [m/s]
	Ends   []relaxation.Ends
}

// Add adds a part, of which no more than ends samples of either end are kept; of parts for which that is 0, the other
// parts' ends stand in.
func (g *Gathered) Add(r *Record, ends int) {
	if g.Power == nil {
		g.Length, g.Power = r.Length, make([]float64, len(r.Power))
	}
	g.Parts++
	for k, p := range r.Power {
		g.Power[k] += p
	}
	g.Square += r.MeanSquare()
	g.Mean += r.Mean
	g.Slope += r.Slope
	if ends > 0 {
		g.Ends = append(g.Ends, relaxation.ShortEnds(r.X[:r.Length], ends))
	}
}

// Record returns the record of the parts, with the length of the recorded unit in metres, and the sampling rate [Hz].
func (g *Gathered) Record(unit, rate float64) *Record {
	parts := float64(g.Parts)
	r := &Record{Samples: g.Parts * g.Length, Length: g.Length, Parts: g.Parts, Rate: rate, Power: make([]float64, len(g.Power)),
		Mean: g.Mean * unit / parts, Slope: g.Slope * unit / parts, square: g.Square * unit * unit / parts}
	for k, p := range g.Power {
		r.Power[k] = p * unit * unit / parts
	}
	for _, e := range g.Ends {
		r.Ends = append(r.Ends, e.Scaled(unit).Weighted(parts/float64(len(g.Ends))))
	}
	return r
}

// beyond returns the ratio of a mean of periodograms to the spectrum that the largest of all values passes with the
// probability chanceOfLine: of a gamma distribution with as many degrees of freedom as there are parts.
func (r *Record) beyond() float64 {
	p := chanceOfLine / float64(len(r.Power))
	if r.Parts <= 1 {
		return -math.Log(p)
	}
	m := float64(r.Parts)
	tail := distuv.Gamma{Alpha: m, Beta: m}
	low, high := 1.0, 1-2*math.Log(p)
	for range 60 {
		if mid := (low + high) / 2; tail.Survival(mid) > p {
			low = mid
		} else {
			high = mid
		}
	}
	return high
}

// nearbyBins is the number of frequencies whose median is the level that a line stands out from.
const nearbyBins = 64

// nearby returns a model times the median of the ratio to it of nearby frequencies. The mean of many periodograms
// is known so well that it departs from any model over broad ranges, which are no lines.
func (r *Record) nearby(model func(k int) float64) func(k int) float64 {
	var levels []float64
	ratios := make([]float64, 0, nearbyBins)
	for from := 0; from < len(r.Power); from += nearbyBins {
		ratios = ratios[:0]
		for k := max(1, from); k < min(from+nearbyBins, len(r.Power)-1); k++ {
			ratios = append(ratios, r.Power[k]/float64(r.Length)/model(k))
		}
		if len(ratios) < nearbyBins/2 && len(levels) > 0 {
			levels = append(levels, levels[len(levels)-1])
			continue
		}
		slices.Sort(ratios)
		levels = append(levels, ratios[len(ratios)/2])
	}
	return func(k int) float64 { return model(k) * levels[k/nearbyBins] }
}

// sidelobes is how far from a line [frequencies] what it leaks is taken off too.
const sidelobes = 1000

// removeExcess takes a line out of the mean periodogram of parts. A sinusoid at k + d has the power
// A^2 N^2/4 sinc^2(j - k - d) at the frequency j: d comes from the two largest excesses over the model, the amplitude A from those around. What
// was there in excess is taken from the mean square. No degree of freedom is lost by that.
func (r *Record) removeExcess(k int, model func(k int) float64) {
	n := float64(r.Length)
	excess := func(j int) float64 { return math.Max(0, r.Power[j]-model(j)*n) }
	side := 1
	if excess(k-1) > excess(k+1) {
		side = -1
	}
	top, next := math.Sqrt(excess(k)), math.Sqrt(excess(k+side))
	at := float64(k) + float64(side)*next/(top+next)
	var product, square float64
	for j := max(1, k-halfGap); j <= min(len(r.Power)-2, k+halfGap); j++ {
		s := sincSquare(float64(j) - at)
		product += s * (r.Power[j] - model(j)*n)
		square += s * s
	}
	power := math.Max(0, product/square)
	for j := max(1, k-sidelobes); j <= min(len(r.Power)-2, k+sidelobes); j++ {
		if j >= k-halfGap && j <= k+halfGap {
			r.Power[j] = model(j) * n
			continue
		}
		r.Power[j] = math.Max(0, r.Power[j]-power*sincSquare(float64(j)-at))
	}
	step := r.Rate / n
	meanSquare := 2 * power / (n * n) // A^2/2: both signs of the frequency
	r.square -= meanSquare
	r.blocked = nil
	r.addLine(Line{Frequency: at * step, Amplitude: math.Sqrt(2 * meanSquare), Low: (float64(k) - halfGap - 0.25) * step, High: (float64(k) + halfGap + 0.25) * step})
}

// sincSquare returns (sin(pi x)/(pi x))^2.
func sincSquare(x float64) float64 {
	if math.Abs(x) < 1e-9 {
		return 1
	}
	s := math.Sin(math.Pi*x) / (math.Pi * x)
	return s * s
}

// addLine keeps a removed line; one that wanders is found in several pieces.
func (r *Record) addLine(line Line) {
	step := r.Rate / float64(r.Length)
	at := slices.IndexFunc(r.Lines, func(l Line) bool { return line.Low <= l.High+step && l.Low <= line.High+step })
	if at < 0 {
		r.Lines = append(r.Lines, line)
		return
	}
	l := &r.Lines[at]
	l.Low, l.High = math.Min(l.Low, line.Low), math.Max(l.High, line.High)
	if line.Amplitude > l.Amplitude {
		l.Frequency, l.Amplitude = line.Frequency, line.Amplitude
	}
}
