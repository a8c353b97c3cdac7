package simulate

import (
	"math"
	"testing"
)

// driven returns a truth whose bead hardly moves by itself, so that the record is the response.
func driven(samples int, rate, exposure, corner float64, parts ...Drive) Truth {
	return Truth{Samples: samples, Rate: rate, Exposure: exposure,
		Axes:  []Axis{{Corner: corner, Variance: 1e-40}},
		Stage: &Stage{Parts: parts}}
}

// Line power of the driven bead, A²/(2(1+fc²/fd²)) (Tolic-Norrelykke et al., Rev. Sci.
// Instrum. 77 (2006) 103101; values recomputed), as the mean square over whole periods.
func TestStageLinePower(t *testing.T) {
	for _, row := range []struct{ amplitude, corner, frequency, want float64 }{
		{150e-9, 400, 28, 5.485620e-17}, {100e-9, 500, 37, 2.723088e-17}, {200e-9, 1000, 32, 2.045905e-17},
	} {
		r := Make(driven(20000, 20000, 0, row.corner, Drive{Waveform: Sine, Amplitude: row.amplitude, Frequency: row.frequency}), 1)
		bead, stage := meanSquare(r.Positions[0]), meanSquare(r.Stage)
		// 2e-7: seven digits of the source. The thermal part is 1e-40.
		if !near(bead, row.want, 2e-7) || !near(stage, row.amplitude*row.amplitude/2, 1e-10) {
			t.Errorf("%+v: line power of bead %v and stage %v m²", row, bead, stage)
		}
	}
}

func meanSquare(x []float64) float64 {
	sum := 0.0
	for _, v := range x {
		sum += v * v
	}
	return sum / float64(len(x))
}

// Steady flow: 100 um/s at fc = 400 Hz displaces the bead by v/(2 pi fc) = 39.789 nm.
func TestStageSteadyFlow(t *testing.T) {
	truth := driven(10000, 10000, 1e-4, 400, Drive{Waveform: Triangle, Amplitude: 25e-6, Frequency: 1})
	r := Make(truth, 1)
	for _, row := range []struct {
		sample int
		want   float64
	}{{2400, 39.789e-9}, {7400, -39.789e-9}, {9900, 39.789e-9}} {
		if got := r.Positions[0][row.sample]; !(math.Abs(got-row.want) <= 0.0005e-9) { // half of the last digit
			t.Errorf("sample %d: displacement %v m, want %v", row.sample, got, row.want)
		}
	}
	// The stage covers 100 um/s x 0.1 ms between samples, and its exposure begins at the time stamp.
	if got := r.Stage[101] - r.Stage[100]; !near(got, 10e-9, 1e-9) {
		t.Errorf("stage step %v m, want 10 nm", got)
	}
	if got := r.Stage[0]; !near(got, 5e-9, 1e-9) {
		t.Errorf("first stage position %v m, want 5 nm", got)
	}
}

// Closed forms against a fine explicit integration of dx/dt = -2 pi fc x + ds/dt, through
// every kind of part, with exposure. Heun's rule over steps of 1e-4 relaxation times has an
// error of 1e-9 of the displacement but for the reversals, which fall inside a step: 1e-4 of the lag.
func TestStageAgainstIntegration(t *testing.T) {
	const corner, rate, exposure = 40.0, 200.0, 3e-3
	truth := driven(260, rate, exposure, corner,
		Drive{Waveform: Triangle, Amplitude: 2e-6, Frequency: 3.3, Duration: 0.5},
		Drive{Waveform: Sine, Amplitude: 1e-6, Frequency: 7, Duration: 0.41},
		Drive{Waveform: Triangle, Amplitude: 1e-6, Frequency: 9})
	truth.Stage.Phase = 2.2
	r := Make(truth, 1)
	relaxation := 2 * math.Pi * corner
	step := 1e-4 / relaxation
	substeps := int(1 / rate / step)
	step = 1 / rate / float64(substeps)
	position := stagePath(truth.Stage)
	x, s := r.Positions[0][0], position(0)
	// The first displacement is unknown to the integration; it is forgotten after a tenth of a second.
	const forgotten = 25
	for i := range r.Stage {
		meanX, meanS, weight := 0.0, 0.0, 0.0
		for j := range substeps {
			time := float64(i)/rate + float64(j)*step
			if float64(j)*step < exposure {
				meanX, meanS, weight = meanX+x, meanS+s, weight+1
			}
			next := position(time + step)
			decay := relaxation * step
			x = x*(1-decay+decay*decay/2) + (next-s)*(1-decay/2)
			s = next
		}
		// 1e-4 x the speed of 36 um/s over the relaxation rate, and the left-hand sums of the mean: half a step.
		tolerance := 1e-4*36e-6/relaxation + 36e-6*step
		if !(math.Abs(r.Stage[i]-meanS/weight) <= tolerance) {
			t.Fatalf("sample %d: stage %v m, want %v", i, r.Stage[i], meanS/weight)
		}
		if i >= forgotten && math.Abs(r.Positions[0][i]-meanX/weight) > 3*tolerance {
			t.Fatalf("sample %d: bead %v m, want %v within %v", i, r.Positions[0][i], meanX/weight, 3*tolerance)
		}
	}
}

// stagePath spells out the motion of the stage from its definition.
func stagePath(s *Stage) func(time float64) float64 {
	shape := func(d Drive, phase float64) float64 {
		if d.Waveform == Sine {
			return d.Amplitude * math.Sin(phase)
		}
		return d.Amplitude * 2 / math.Pi * math.Asin(math.Sin(phase))
	}
	return func(time float64) float64 {
		offset, phase := 0.0, s.Phase
		for i, d := range s.Parts {
			if i > 0 {
				offset -= shape(d, 0)
			}
			if d.Duration == 0 || time < d.Duration {
				return offset + shape(d, phase+2*math.Pi*d.Frequency*time)
			}
			offset += shape(d, phase+2*math.Pi*d.Frequency*d.Duration)
			time, phase = time-d.Duration, 0
		}
		return offset
	}
}

// A driven bead starts in the steady state: one period on, it is where it was.
func TestStageStartsSteady(t *testing.T) {
	for _, d := range []Drive{{Waveform: Sine, Amplitude: 1e-6, Frequency: 10}, {Waveform: Triangle, Amplitude: 1e-6, Frequency: 10}} {
		for _, phase := range []float64{0, 1, 2, -2, 5, 9.7} {
			truth := driven(200, 1000, 1e-3, 15, d)
			truth.Stage.Phase = phase
			r := Make(truth, 1)
			for i := range 100 {
				if !(math.Abs(r.Positions[0][i]-r.Positions[0][i+100]) <= 1e-17) { // rounding of 1 um and the thermal 1e-20 m
					t.Fatalf("%v, phase %v, sample %d: %v, a period later %v", d.Waveform, phase, i, r.Positions[0][i], r.Positions[0][i+100])
				}
			}
		}
	}
}

// The photodiode filters the bead's line and leaves the stage alone.
func TestStagePhotodiode(t *testing.T) {
	truth := driven(20000, 20000, 0, 400, Drive{Waveform: Sine, Amplitude: 150e-9, Frequency: 28})
	truth.Photodiode = &Photodiode{Alpha: 0.3, F3dB: 28}
	r := Make(truth, 1)
	if got, want := meanSquare(r.Positions[0]), 0.545*5.485620e-17; !near(got, want, 2e-7) { // g = (1+alpha²)/2 at f3dB
		t.Errorf("line power %v, want %v", got, want)
	}
	if got := meanSquare(r.Stage); !near(got, 150e-9*150e-9/2, 1e-10) {
		t.Errorf("stage power %v", got)
	}
}

// At f3dB a diode without prompt light delays the line by an eighth of a period.
func TestStagePhotodiodeDelays(t *testing.T) {
	truth := driven(4000, 16000, 0, 400, Drive{Waveform: Sine, Amplitude: 150e-9, Frequency: 20})
	plain := Make(truth, 1).Positions[0]
	truth.Photodiode = &Photodiode{F3dB: 20}
	for i, x := range Make(truth, 1).Positions[0][100:] {
		if want := plain[i] / math.Sqrt2; !(math.Abs(x-want) <= 1e-19) { // the thermal 1e-20 m; 800 samples a period
			t.Fatalf("sample %d: %v, want %v", i+100, x, want)
		}
	}
}

// A bead that escapes goes with the liquid: from then on position and stage differ by free diffusion, whose steps have the variance
// 2 D dt, and before by the motion in the trap.
func TestEscapeInStage(t *testing.T) {
	truth := Truth{Samples: 40000, Rate: 10e3, Axes: []Axis{{Corner: 500, Variance: 1e-16}}, Events: []Event{{Kind: Escape, Time: 2}},
		Stage: &Stage{Parts: []Drive{{Waveform: Triangle, Amplitude: 5e-6, Frequency: 4}}}}
	r := Make(truth, 3)
	x, square := r.Positions[0], 0.0
	const from = 20000
	for i := from + 1; i < len(x); i++ {
		d := (x[i] - r.Stage[i]) - (x[i-1] - r.Stage[i-1])
		square += d * d / float64(len(x)-from-1)
	}
	// relative standard deviation sqrt(2/20000) = 1 %
	if want := 2 * 2 * math.Pi * 500 * 1e-16 / 10e3; math.Abs(square/want-1) > 0.04 {
		t.Errorf("steps after the escape have the variance %.4g m2, want %.4g", square, want)
	}
	if jump := math.Abs(x[from] - x[from-1]); jump > 1e-7 { // 2 nm of flow and a step of thermal motion
		t.Errorf("the bead jumps by %g m at the escape", jump)
	}
	truth.Events = append(truth.Events, Event{Kind: Stuck, Time: 3})
	if err := truth.Validate(); err == nil {
		t.Error("a second event passes")
	}
}
