package main

import (
	"context"
	"fmt"
	"math"

	"beadwell/calib"
	"beadwell/calib/drag"
	"beadwell/calib/medium"
	"beadwell/calib/session"
	"beadwell/calib/simulate"
	"beadwell/calib/track"
)

// kindCell is a kind of recording beside that of a trapped bead before a stage at rest: a moving stage, a free bead, volts, a
// photodiode, the inertia of the liquid. All inputs are exact; what is scored is the statistics of the recording.
type kindCell struct {
	Name    string
	group   string
	radius  float64 // m
	height  float64 // m; +Inf: far
	corner  float64 // Hz
	rate    float64 // Hz
	samples int

	exposure, noise float64 // s; m
	inertia         bool    // of the liquid, simulated
	free            bool
	stage           *simulate.Stage
	column          bool    // the stage's own track is recorded
	volts           float64 // sensitivity, m/V; 0: metres
	diode           *simulate.Photodiode
	settings        map[string]string
}

// Groups of kinds.
const (
	roleGroup    = "role"
	inertiaGroup = "inertia"
)

const (
	kindRadius   = 0.5e-6  // m
	kindHeight   = 8e-6    // m
	kindKelvin   = 298.15  // K
	kindVolts    = 1.31e-6 // m/V
	kindDensity  = 1050.0  // kg/m3, polystyrene
	kindDuration = 4.0     // s
)

// kindCells lists the kinds.
func kindCells() []kindCell {
	base := kindCell{group: roleGroup, radius: kindRadius, height: kindHeight, corner: 500, rate: 8e3, samples: int(kindDuration * 8e3)}
	var list []kindCell
	add := func(name string, change func(*kindCell)) {
		c := base
		c.Name = name
		change(&c)
		list = append(list, c)
	}
	sine := &simulate.Stage{Phase: 0.7, Parts: []simulate.Drive{{Waveform: simulate.Sine, Amplitude: 400e-9, Frequency: 38.37}}}
	triangle := &simulate.Stage{Phase: 1.1, Parts: []simulate.Drive{{Waveform: simulate.Triangle, Amplitude: 5e-6, Frequency: 8}}}
	motion := func(words ...string) map[string]string {
		m := map[string]string{"role": calib.RoleDriven, "drive.waveform": words[0]}
		if len(words) > 1 {
			m["drive.amplitude"], m["drive.frequency"] = words[1], words[2]
		}
		return m
	}
	add("sine, column of the stage", func(c *kindCell) { c.stage, c.column, c.settings = sine, true, motion("sine") })
	add("sine, settings alone", func(c *kindCell) { c.stage, c.settings = sine, motion("sine", "400 nm", "38.37 Hz") })
	add("sine, volts", func(c *kindCell) {
		c.stage, c.volts, c.settings = sine, kindVolts, motion("sine", "400 nm", "38.37 Hz")
	})
	add("triangle, column of the stage", func(c *kindCell) { c.stage, c.column, c.settings = triangle, true, motion("triangle") })
	add("triangle, settings alone", func(c *kindCell) { c.stage, c.settings = triangle, motion("triangle", "5 um", "8 Hz") })
	add("free bead, detector", func(c *kindCell) { c.free, c.noise, c.settings = true, 5e-9, map[string]string{"role": calib.RoleFree} })
	add("free bead, camera", func(c *kindCell) {
		c.free, c.noise, c.rate, c.samples, c.exposure, c.settings = true, 10e-9, 500, 4000, 1.6e-3, map[string]string{"role": calib.RoleFree}
	})
	add("volts, no sensitivity", func(c *kindCell) { c.volts = kindVolts })
	add("photodiode fitted", func(c *kindCell) {
		c.rate, c.samples, c.diode, c.settings = 50e3, 1<<17, &simulate.Photodiode{Alpha: 0.3, F3dB: 8000}, map[string]string{"detector.f3db": "fit"}
	})
	return append(list, inertiaCells()...)
}

// inertiaCells are recordings with frequency-dependent drag, fitted with it: bead, corner, rate and height over the range of labs, long
// enough for a precision of about 1 % of the corner frequency.
func inertiaCells() []kindCell {
	var list []kindCell
	for _, c := range []struct{ radius, corner, rate, height float64 }{
		{0.25e-6, 500, 100e3, math.Inf(1)}, {0.25e-6, 5000, 500e3, math.Inf(1)}, {0.5e-6, 500, 50e3, 2}, {0.5e-6, 2000, 100e3, 5},
		{0.5e-6, 5000, 500e3, 2}, {1e-6, 200, 50e3, 3}, {2.5e-6, 50, 10e3, math.Inf(1)}, {2.5e-6, 500, 100e3, 2},
	} {
		k := kindCell{group: inertiaGroup, radius: c.radius, corner: c.corner, rate: c.rate, height: c.height * c.radius, inertia: true,
			settings: map[string]string{"fit.drag": calib.FrequencyDependentDrag, "bead.density": "1.05 g/cm3"}}
		// sd of ln fc is about 1.25/sqrt(pi fc T) where the band is wide: 1 % at fc T = 5000
		k.samples = int(5000 / c.corner * c.rate)
		at := "far from any surface"
		if !math.IsInf(c.height, 1) {
			at = fmt.Sprintf("h/R %g", c.height)
		}
		k.Name = fmt.Sprintf("inertia: R %g um, fc %g Hz, rate %g kHz, %s", c.radius*1e6, c.corner, c.rate/1e3, at)
		list = append(list, k)
	}
	return list
}

// bead returns kT [J], the drag [N s/m] and what the simulator needs of the inertia.
func (c kindCell) bead() (kT, gamma float64, h *simulate.Hydrodynamics, wall drag.Wall, err error) {
	liquid, err := medium.ParseFluid("water")
	if err != nil {
		return 0, 0, nil, wall, err
	}
	p, err := liquid.At(kindKelvin)
	if err != nil {
		return 0, 0, nil, wall, err
	}
	if wall, err = (drag.Chamber{Radius: c.radius, Height: c.height}).Wall(); err != nil {
		return 0, 0, nil, wall, err
	}
	if c.inertia {
		h = &simulate.Hydrodynamics{Radius: c.radius, Viscosity: p.Viscosity, Density: p.Density, BeadDensity: kindDensity}
		if !math.IsInf(c.height, 1) {
			h.Height = c.height
		}
	}
	return medium.Boltzmann * kindKelvin, drag.Stokes(p.Viscosity, c.radius) * wall.Factor, h, wall, nil
}

// record simulates one recording.
func (c kindCell) record(seed uint64) (*track.Recording, error) {
	kT, gamma, h, wall, err := c.bead()
	if err != nil {
		return nil, err
	}
	axis := simulate.Axis{Name: "x", Corner: c.corner, Variance: kT / (2 * math.Pi * c.corner * gamma), Noise: c.noise, WallFactor: wall.Factor}
	if c.free {
		axis = simulate.Axis{Name: "x", Diffusion: kT / gamma, Noise: c.noise}
	}
	t := simulate.Truth{Samples: c.samples, Rate: c.rate, Exposure: c.exposure, Stage: c.stage, Photodiode: c.diode, Hydrodynamics: h, Axes: []simulate.Axis{axis}}
	if err := t.Validate(); err != nil {
		return nil, err
	}
	made, nan := simulate.Make(t, seed), math.NaN()
	a := track.Axis{Name: "x", Header: "x", Unit: "m", ToMetre: 1, Values: made.Positions[0]}
	if c.volts > 0 {
		a.Unit, a.ToMetre = "V", nan
		for i := range a.Values {
			a.Values[i] /= c.volts
		}
	}
	rec := &track.Recording{Name: "simulated", Rate: c.rate, RateU: nan, RateOrigin: "setting", Samples: c.samples, JitterRMS: nan, JitterMax: nan, Axes: []track.Axis{a}}
	if c.column {
		rec.Extra = []track.Column{{Header: "stage", Values: made.Stage}}
		rec.ReadAs.Columns = append(rec.ReadAs.Columns, track.ColumnUse{Header: "stage", Role: "kept", Unit: "m"})
	}
	return rec, nil
}

// state returns the settings.
func (c kindCell) state() (*session.Settings, error) {
	text := map[string]string{"bead.diameter": fmt.Sprintf("%.12g m", 2*c.radius), "medium.temperature": fmt.Sprintf("%g K", kindKelvin), "medium.fluid": "water",
		"recording.exposure": fmt.Sprintf("%g s", c.exposure), "fit.drag": calib.ConstantDrag, "chamber.height": "far"}
	if !math.IsInf(c.height, 1) {
		text["chamber.height"] = fmt.Sprintf("%.12g m", c.height)
	}
	if c.noise == 0 {
		text["recording.noise"] = "0 m"
	}
	for key, value := range c.settings {
		text[key] = value
	}
	flags := &session.Settings{}
	for key, value := range text {
		if err := flags.Set(key, "", value, session.FromFlag, key); err != nil {
			return nil, err
		}
	}
	return session.ForTrack(session.Sources{Flags: flags})
}

// KindScore is the score of a kind: a tally of each quantity that it gives.
type KindScore struct {
	Name   string
	Runs   int
	Failed int
	Scores map[string]*Tally
	Order  []string
}

func (s *KindScore) add(name string, q calib.Quantity, truth float64) {
	t := s.Scores[name]
	if t == nil {
		t = &Tally{}
		s.Scores[name], s.Order = t, append(s.Order, name)
	}
	t.add(q, truth)
}

// kindSeed separates the recordings of the kinds from each other and from those of the other studies.
func kindSeed(index, run int) uint64 { return 900_000_000 + 100_000*uint64(index) + uint64(run) }

// studyKind simulates and calibrates recordings until there are n.
func studyKind(ctx context.Context, index int, c kindCell, n int, s *KindScore) error {
	set, err := c.state()
	if err != nil {
		return err
	}
	kT, gamma, _, _, err := c.bead()
	if err != nil {
		return err
	}
	kappa := 2 * math.Pi * c.corner * gamma
	for ; s.Runs < n && ctx.Err() == nil; s.Runs++ {
		rec, err := c.record(kindSeed(index, s.Runs))
		if err != nil {
			return err
		}
		r, err := calib.Calibrate(ctx, rec, set, calib.Options{})
		switch {
		case ctx.Err() != nil: // this one was not done
			return nil
		case err != nil:
			s.Failed++
			continue
		}
		s.scoreKind(r.Axes[0], kappa, gamma, kT, c)
	}
	return nil
}

// scoreKind compares what one recording gives with the truth.
func (s *KindScore) scoreKind(a calib.Axis, kappa, gamma, kT float64, c kindCell) {
	if f := a.Free; f != nil {
		s.add("diffusion coefficient", f.Diffusion, kT/gamma)
		s.add("drag", a.MeasuredDrag, gamma)
		return
	}
	for _, e := range a.Estimates {
		switch e.Leg {
		case calib.LegDriven:
			s.add("stiffness, driven stage", e.Stiffness, kappa)
		case calib.LegFlow:
			if e.Stiffness.Known() {
				s.add("stiffness, constant flow", e.Stiffness, kappa)
			}
		case calib.LegSpectrum:
			s.add("stiffness, corner frequency", e.Stiffness, kappa)
		case calib.LegSpectrumAmplitude:
			if e.Stiffness.Known() {
				s.add("stiffness, amplitude of the spectrum", e.Stiffness, kappa)
			}
		case calib.LegEquipartition:
			if e.Stiffness.Known() {
				s.add("stiffness, variance", e.Stiffness, kappa)
			}
		}
	}
	s.add("stiffness, adopted", a.Adopted.Stiffness, kappa)
	if d := a.Driven; d != nil {
		s.add("drag, driven stage", d.Drag, gamma)
		if c.volts == 0 {
			s.add("length scale", d.LengthScale, 1)
		}
	}
	if c.volts > 0 {
		s.add("sensitivity", a.Sensitivity.Used, c.volts)
	}
	if p := a.Photodiode; p != nil {
		s.add("alpha", p.Alpha, c.diode.Alpha)
		s.add("f3dB", p.F3dB, c.diode.F3dB)
	}
}
