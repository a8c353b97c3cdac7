package simulate

import (
	"fmt"
	"math"
)

// Faults is what the detector or the computer spoils. The zero value spoils
// nothing. They act in the order of the fields, and their random choices have streams of
// their own: what is left of the positions is what the same seed gives without faults.
type Faults struct {
	Rail     float64 `json:"rail_m,omitempty"`         // positions farther than this from Mean [m] read as this; 0 is no limit
	Rounding float64 `json:"rounding_m,omitempty"`     // positions are rounded to whole multiples of this [m]; 0 is no rounding
	Jitter   float64 `json:"jitter_s,omitempty"`       // standard deviation of the error of the time stamps [s]; the sampling stays even
	Blank    float64 `json:"blank_share,omitempty"`    // share of samples, 0 to 1, whose positions are lost (NaN)
	Dropped  float64 `json:"dropped_share,omitempty"`  // share of samples, 0 to 1, missing altogether
	Repeated float64 `json:"repeated_share,omitempty"` // share of samples, 0 to 1, recorded twice, time stamp included
}

func (f Faults) validate() error {
	for _, row := range []struct {
		name, unit string
		value      float64
	}{{"rail", "m", f.Rail}, {"rounding", "m", f.Rounding}, {"jitter", "s", f.Jitter}} {
		if !(row.value >= 0) || !finite(row.value) {
			return fmt.Errorf("%s %v %s: must be 0 or positive", row.name, row.value, row.unit)
		}
	}
	for _, row := range []struct {
		name  string
		value float64
	}{{"blank", f.Blank}, {"dropped", f.Dropped}, {"repeated", f.Repeated}} {
		if !(row.value >= 0 && row.value < 1) {
			return fmt.Errorf("%s share %v: from 0 to below 1", row.name, row.value)
		}
	}
	return nil
}

// spoil applies the faults to a recording of the truth.
func (f Faults) spoil(r *Recording, t Truth, seed uint64) {
	for i, x := range r.Positions {
		if f.Rail > 0 {
			clip(x, t.Axes[i].Mean-f.Rail, t.Axes[i].Mean+f.Rail)
		}
		if f.Rounding > 0 {
			round(x, f.Rounding)
		}
	}
	if f.Jitter > 0 {
		addStampNoise(r.Time, f.Jitter, seed)
	}
	if f.Blank > 0 || f.Dropped > 0 || f.Repeated > 0 {
		f.lose(r, seed)
	}
}

func clip(x []float64, low, high float64) {
	for i, v := range x {
		x[i] = math.Min(math.Max(v, low), high)
	}
}

func round(x []float64, step float64) {
	for i, v := range x {
		x[i] = math.RoundToEven(v/step) * step
	}
}

func addStampNoise(time []float64, sd float64, seed uint64) {
	random := newDeviates(seed, 0, stamps)
	for i := range time {
		z, _ := random.pair()
		time[i] += float64(sd * z)
	}
}

// lose blanks, drops and repeats samples. Three draws are made for each sample, so that no
// choice depends on another share. The first sample always stays.
func (f Faults) lose(r *Recording, seed uint64) {
	source := newDeviates(seed, 0, losses).source
	chance := func() float64 { return float64(source.Uint64()>>11) / (1 << 53) }
	rows := make([]int, 0, len(r.Time))
	for i := range r.Time {
		blank, dropped, repeated := chance() < f.Blank, chance() < f.Dropped, chance() < f.Repeated
		if blank && i > 0 {
			for _, x := range r.Positions {
				x[i] = math.NaN()
			}
		}
		if dropped && i > 0 {
			continue
		}
		if rows = append(rows, i); repeated {
			rows = append(rows, i)
		}
	}
	r.Time = pick(r.Time, rows)
	for i, x := range r.Positions {
		r.Positions[i] = pick(x, rows)
	}
	if r.Stage != nil {
		r.Stage = pick(r.Stage, rows)
	}
}

func pick(x []float64, rows []int) []float64 {
	kept := make([]float64, len(rows))
	for i, row := range rows {
		kept[i] = x[row]
	}
	return kept
}
