package health

import (
	"fmt"

	"beadwell/calib/relaxation"
)

// Input is a recording with what a fit has found out about it. All slices are read only.
type Input struct {
	Axes       []Axis
	Rate       float64 // sampling rate [Hz]; without a positive one nothing that needs time is judged
	Start      float64 // time of the first sample [s]; texts count from it, Ranges from the first sample
	Exposure   float64 // exposure of each sample [s]
	Missing    int     // samples that are missing on every axis
	Duplicates int     // samples that came twice and were left out by the reader
	// Products are, of axes that were gathered, the sums of the products of two of them about their mean and line, in the
	// order (0, 1), (0, 2) .. (1, 2) .. [unit of X, squared], with the samples that are there on both.
	Products  []Product
	JitterRMS float64 // root mean square of the time stamps about even sampling [s]; NaN or 0 without stamps
}

// Product is the sum of the products of two axes.
type Product struct {
	Sum     float64
	Samples int
}

// Axis is one coordinate. All axes have the same number of samples.
type Axis struct {
	Name     string
	Unit     string             // of X; empty is m. Process, Lines and texts use the same
	X        []float64          // positions [m], the mean included; NaN is a missing sample
	Gathered *Gathered          // what was kept of a record whose samples are not at hand; X is nil then
	Process  relaxation.Process // the fitted process
	Known    bool               // Process holds a fit; false when none could be made
	CornerSD float64            // standard uncertainty of ln(Process.Corner) from the fit; 0: not given
	Lines    []Line             // narrow lines that the fit has removed
	// Spectrum is the periodogram of X without mean and line, nothing else taken off and nothing missing, where somebody has
	// computed it; nil: the checks make their own.
	Spectrum  *Spectrum
	GoodnessP float64 // p-value of the fitted spectrum; NaN, or 0 with Known false, when there is none
}

// Spectrum is a periodogram: the mean of |X_k|^2 [unit of X, squared] over Segments stretches of Length samples, or over as many
// neighbouring frequencies of one stretch Segments times as long.
type Spectrum struct {
	Power    []float64
	Length   float64 // samples; frequency k is k times the rate over this
	Segments int
}

// SpectrumOf returns the periodogram |X_k|^2, k = 0 .. n/2, of a record of n samples in the resolution in which lines are looked for.
func SpectrumOf(power []float64, n int) *Spectrum {
	m := (n + toneSegment - 1) / toneSegment
	if m <= 1 {
		return &Spectrum{Power: power, Length: float64(n), Segments: 1}
	}
	m |= 1 // odd, so that a group of frequencies has a middle
	s := &Spectrum{Power: make([]float64, 0, len(power)/m+1), Length: float64(n) / float64(m), Segments: m}
	// A sinusoid has all of its power, n^2 A^2/4, at one frequency: over m^2 it is that of a stretch of n/m samples.
	// The noise of a stretch is that of the record over m, and a mean over m frequencies has as much again.
	for from := -m / 2; from+m <= len(power); from += m {
		sum := 0.0
		for _, p := range power[max(from, 0) : from+m] {
			sum += p
		}
		s.Power = append(s.Power, sum/float64(m*m))
	}
	return s
}

// sampleCount returns the number of samples, with the missing ones.
func (a Axis) sampleCount() int {
	if a.Gathered != nil {
		return a.Gathered.Samples()
	}
	return len(a.X)
}

// missingCount returns the number of samples that are missing.
func (a Axis) missingCount() int {
	if a.Gathered != nil {
		return a.Gathered.Missing()
	}
	n := 0
	for _, x := range a.X {
		if x-x != 0 {
			n++
		}
	}
	return n
}

// Line is a narrow line in the spectrum.
type Line struct {
	Frequency float64 // [Hz]
	Amplitude float64 // half of the peak-to-peak excursion [m]
}

// Level is the outcome of a check.
type Level int

const (
	OK       Level = iota // nothing to worry about, or not judged
	Doubtful              // usable with the caution that the text gives
	Bad                   // not to be trusted as it stands
)

// String returns "ok", "doubtful" or "bad".
func (l Level) String() string {
	switch l {
	case OK:
		return "ok"
	case Doubtful:
		return "doubtful"
	case Bad:
		return "bad"
	}
	return fmt.Sprintf("Level(%d)", int(l))
}

// Check is the outcome of one check.
type Check struct {
	Code      string       // stable word for programs, see Codes
	Name      string       // a few words for a table
	Axis      string       // name of the axis, two names joined by "-" for a pair, empty for the recording
	Level     Level        //
	Judged    bool         // false: the check could not be made; Text says why
	Value     float64      // the number that was judged; NaN when there is none
	Threshold float64      // the value at which it becomes doubtful; NaN when there is none
	Unit      string       // of Value and Threshold; "1" for a ratio
	Text      string       // what was found
	Reason    string       // why it matters
	Remedy    string       // what to do; empty when Level is OK
	Ranges    [][2]float64 // where in the record, from and to [s]; nil: everywhere or nowhere in particular
}
