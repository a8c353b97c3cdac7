package calib

import (
	"context"
	"fmt"
	"maps"
	"math"
	"math/rand/v2"
	"testing"

	"beadwell/calib/drag"
	"beadwell/calib/medium"
	"beadwell/calib/session"
	"beadwell/calib/simulate"
	"beadwell/calib/track"
)

// bench of the tests: a bead of 1 um in water at 25 C, seen by a camera of 10 kHz.
type stage struct {
	diameter, kelvin, height, pixel float64 // true and, unless a case says otherwise, stated
	rate, exposure, noise           float64 // true; exposure in units of the sampling interval
	seconds                         float64
	axes                            string  // "x", "xz"
	uneven                          float64 // factor on the true length of a pixel along x alone
	drift                           float64 // rms of a random walk about its straight line (n/15 of the squared step), in thermal rms
	inertia                         bool    // of the liquid
}

func ordinary() stage {
	return stage{diameter: 1e-6, kelvin: 298.15, height: 5e-6, pixel: 100e-9, rate: 10e3, exposure: 0.3, noise: 2e-9, seconds: 12, axes: "x", uneven: 1}
}

const trueCorner = 500.0 // Hz, of x in an ordinary stage

// settings states what the user believes.
func (s stage) settings(t testing.TB) *session.Settings {
	t.Helper()
	return s.settingsWith(t, nil)
}

// settingsWith replaces some of the settings.
func (s stage) settingsWith(t testing.TB, more map[string]string) *session.Settings {
	t.Helper()
	text := map[string]string{
		"bead.diameter":      fmt.Sprintf("%g m +- %g m", s.diameter, 0.02*s.diameter),
		"medium.temperature": fmt.Sprintf("%g K +- 0.5 K", s.kelvin),
		"chamber.height":     fmt.Sprintf("%g m +- %g m", s.height, 0.05*s.height),
		"recording.pixel":    fmt.Sprintf("%g m +- %g m", s.pixel, 0.01*s.pixel),
		"recording.exposure": fmt.Sprintf("%.15g s", s.exposure/s.rate),
		"recording.noise":    fmt.Sprintf("%g m", s.noise),
		"medium.fluid":       "water",
		"fit.drag":           "constant",
		"fit.perpendicular":  "z",
	}
	maps.Copy(text, more)
	flags := &session.Settings{}
	for key, value := range text {
		if err := flags.Set(key, "", value, session.FromFlag, key); err != nil {
			t.Fatal(err)
		}
	}
	set, err := session.ForTrack(session.Sources{Flags: flags})
	if err != nil {
		t.Fatal(err)
	}
	return set
}

// simulated is the truth in the terms of the simulator.
func (s stage) simulated(t testing.TB) simulate.Truth {
	t.Helper()
	p := waterAt(t, s.kelvin)
	ordinaryGamma := drag.Stokes(0.89e-3, 0.5e-6)
	truth := simulate.Truth{Samples: int(s.seconds * s.rate), Rate: s.rate, Exposure: s.exposure / s.rate}
	for _, name := range s.axes {
		wall, err := drag.Chamber{Radius: s.diameter / 2, Height: s.height, Perpendicular: name == 'z'}.Wall()
		if err != nil {
			t.Fatal(err)
		}
		gamma := drag.Stokes(p.Viscosity, s.diameter/2) * wall.Factor
		kappa := 2 * math.Pi * ordinaryGamma * trueCorner
		truth.Axes = append(truth.Axes, simulate.Axis{Name: string(name), Corner: kappa / (2 * math.Pi * gamma), Variance: medium.Boltzmann * s.kelvin / kappa, Noise: s.noise, WallFactor: wall.Factor, Perpendicular: name == 'z'})
	}
	if s.inertia {
		truth.Hydrodynamics = &simulate.Hydrodynamics{Radius: s.diameter / 2, Viscosity: p.Viscosity, Density: p.Density, BeadDensity: 1050, Height: s.height}
	}
	return truth
}

// recording simulates the truth.
func (s stage) recording(t testing.TB, seed uint64) *track.Recording {
	t.Helper()
	truth := s.simulated(t)
	columns := simulate.Record(truth, seed)
	nan := math.NaN()
	rec := &track.Recording{Name: "simulated", Rate: s.rate, RateU: nan, RateOrigin: "setting", Samples: truth.Samples, JitterRMS: nan, JitterMax: nan}
	rng := rand.New(rand.NewPCG(seed, 77))
	for i, x := range columns {
		pixel := s.pixel
		if i == 0 {
			pixel *= s.uneven
		}
		wander, step := 0.0, s.drift*math.Sqrt(truth.Axes[i].Variance)/math.Sqrt(float64(len(x))/15)
		for j := range x {
			wander += step * rng.NormFloat64()
			x[j] = (x[j] + wander) / pixel
		}
		rec.Axes = append(rec.Axes, track.Axis{Name: truth.Axes[i].Name, Header: truth.Axes[i].Name, Unit: "px", ToMetre: nan, Values: x})
	}
	return rec
}

// fault is a truth and what is stated of it.
type fault struct {
	name, code string
	truth      func(s *stage)
	stated     func(s *stage)
	needed     float64 // SI; NaN when it has no one value
	alone      bool    // theory separates it
}

func (f fault) diagnose(t testing.TB, seed uint64) *Result {
	t.Helper()
	truth := ordinary()
	if f.truth != nil {
		f.truth(&truth)
	}
	stated := truth
	if f.stated != nil {
		f.stated(&stated)
	}
	rec := truth.recording(t, seed)
	rec.Rate = stated.rate
	r, err := Calibrate(context.Background(), rec, stated.settings(t), Options{})
	if err != nil {
		t.Fatalf("%s, seed %d: %v", f.name, seed, err)
	}
	return r
}

var faults = []fault{
	{name: "length scale off by 6 %", code: CauseScale, needed: 94e-9,
		truth: func(s *stage) { s.pixel = 94e-9 }, stated: func(s *stage) { s.pixel = 100e-9 }},
	{name: "temperature off by 8 K", code: CauseTemperature, needed: 298.15 + 8,
		truth: func(s *stage) { s.kelvin += 8 }, stated: func(s *stage) { s.kelvin -= 8 }},
	{name: "diameter off by 10 %", code: CauseDiameter, needed: 1.1e-6,
		truth: func(s *stage) { s.diameter = 1.1e-6 }, stated: func(s *stage) { s.diameter = 1e-6 }},
	{name: "height off by two near the wall", code: CauseHeight, needed: 0.7e-6,
		truth: func(s *stage) { s.height = 0.7e-6 }, stated: func(s *stage) { s.height = 1.4e-6 }},
	{name: "height off by two near the wall, with a perpendicular axis", code: CauseHeight, needed: 0.7e-6, alone: true,
		truth: func(s *stage) { s.height, s.axes = 0.7e-6, "xz" }, stated: func(s *stage) { s.height = 1.4e-6 }},
	{name: "exposure stated as 0 when it was a full frame", code: CauseExposure, needed: 1e-4, alone: true,
		truth: func(s *stage) { s.exposure = 1 }, stated: func(s *stage) { s.exposure = 0 }},
	{name: "rate stated twice too high", code: CauseRate, needed: 5e3,
		truth: func(s *stage) { s.rate, s.seconds = 5e3, 24 }, stated: func(s *stage) { s.rate, s.exposure = 10e3, 0.6 }},
	{name: "scale of x alone", code: CauseScaleOne, needed: 94e-9, alone: true,
		truth: func(s *stage) { s.axes, s.uneven = "xz", 0.94 }},
	{name: "noise of 8 nm stated as 2 nm", code: CauseNoise, needed: 8e-9, alone: true,
		truth: func(s *stage) { s.noise = 8e-9 }, stated: func(s *stage) { s.noise = 2e-9 }},
}
