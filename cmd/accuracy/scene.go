package main

import (
	"fmt"
	"math"
	"math/rand/v2"

	"beadwell/calib"
	"beadwell/calib/drag"
	"beadwell/calib/medium"
	"beadwell/calib/session"
	"beadwell/calib/simulate"
	"beadwell/calib/track"
)

// scene is a bead in a trap and a way of recording it. A second scene holds what is
// stated of the first; where they differ, the statement is at fault.
type scene struct {
	diameter, kelvin, height, pixel float64 // m, K, m, m
	thickness                       float64 // factor on the viscosity of water
	rate, exposure, noise           float64 // Hz, s, m
	samples                         int
	axes                            string     // "x", "xy", "xyz"; z is normal to the surface
	uneven                          float64    // factor on the true length of a pixel along x alone
	soft                            [3]float64 // stiffnesses of the axes over that of x
	wander                          float64    // rms of a random walk about its straight line, in thermal rms
	inertia                         bool       // of the liquid
	unknownNoise                    bool       // the noise is not stated
	noiseRecorded                   bool       // in theory alone: the noise was measured with the scale that is stated
	exact                           bool       // no uncertainty is stated
	drive                           float64    // amplitude of a sinusoidal motion of the stage along x [m]; 0: at rest
	free                            bool       // no trap, the laser off
	heating                         float64    // of the trap by the laser [K]

	spoil func(t *simulate.Truth, s scene) // what else happens; nil: nothing
}

// Stated standard uncertainties of a careful lab. With them an ideal test can see the faults of
// the study.
const (
	carefulDiameter = 0.01  // relative
	carefulKelvin   = 0.3   // K
	carefulHeight   = 0.03  // relative
	carefulPixel    = 0.005 // relative
	carefulDrive    = 0.004 // relative
	driveHz         = 187.3 // of the stage
)

// usual is the bead of the study before a camera or a detector whose regime is that of a cell.
func usual(c Cell, axes string) scene {
	return scene{diameter: statedDiameter, kelvin: statedKelvin, height: statedHeight, pixel: statedPixel, thickness: 1, rate: c.rate(), samples: c.samples(),
		exposure: c.Exposure / c.rate(), noise: c.Noise * thermal(1), unknownNoise: c.Unknown, axes: axes, uneven: 1, soft: softer}
}

// softer are the stiffnesses of the axes of an ordinary trap over that of x; equal are those
// of one whose axes are all in the regime of the cell.
var (
	softer = [3]float64{1, 0.85, 0.6}
	equal  = [3]float64{1, 1, 1}
)

// stiffness of a trap of a stiffness over that of x [N/m]: x has the corner frequency of the study at the stated height.
func stiffness(relative float64) float64 {
	liquid, err := medium.ParseFluid("water")
	if err != nil {
		panic(err) // water is built in
	}
	w, err := computed(liquid, statedDiameter, statedKelvin, statedHeight)
	if err != nil {
		panic(err) // the stated values are constants
	}
	return relative * 2 * math.Pi * w.gamma * corner
}

// wanderSteps: a random walk of n steps is n/15 of the squared step about its straight line.
const wanderSteps = 15

// beadDensity is that of polystyrene [kg/m3].
const beadDensity = 1050

// thermal is the thermal rms at a relative stiffness and the stated temperature [m].
func thermal(relative float64) float64 {
	return math.Sqrt(medium.Boltzmann * statedKelvin / stiffness(relative))
}

// process returns kT [J] and the drag [N s/m] of an axis.
func (s scene) process(axis rune) (kT, gamma float64, wall drag.Wall, err error) {
	liquid, err := medium.ParseFluid("water")
	if err != nil {
		return 0, 0, wall, err
	}
	kelvin := s.kelvin
	if !s.free {
		kelvin += s.heating
	}
	p, err := liquid.At(kelvin)
	if err != nil {
		return 0, 0, wall, err
	}
	wall, err = drag.Chamber{Radius: s.diameter / 2, Height: s.height, Perpendicular: axis == 'z'}.Wall()
	return medium.Boltzmann * kelvin, drag.Stokes(p.Viscosity*s.thickness, s.diameter/2) * wall.Factor, wall, err
}

// truth is the scene in the terms of the simulator.
func (s scene) truth() (simulate.Truth, error) {
	t := simulate.Truth{Samples: s.samples, Rate: s.rate, Exposure: s.exposure}
	for i, name := range s.axes {
		kT, gamma, wall, err := s.process(name)
		if err != nil {
			return t, err
		}
		a := simulate.Axis{Name: string(name), Noise: s.noise, Mean: float64(i+1) * 1e-6, WallFactor: wall.Factor, Perpendicular: name == 'z'}
		if s.free {
			a.Diffusion = kT / gamma
		} else {
			a.Corner, a.Variance = stiffness(s.soft[i])/(2*math.Pi*gamma), kT/stiffness(s.soft[i])
		}
		t.Axes = append(t.Axes, a)
	}
	if s.inertia {
		liquid, err := medium.ParseFluid("water")
		if err != nil {
			return t, err
		}
		p, err := liquid.At(s.kelvin)
		if err != nil {
			return t, err
		}
		t.Hydrodynamics = &simulate.Hydrodynamics{Radius: s.diameter / 2, Viscosity: p.Viscosity, Density: p.Density, BeadDensity: beadDensity, Height: s.height}
	}
	if s.drive > 0 {
		t.Stage = &simulate.Stage{Phase: 0.7, Parts: []simulate.Drive{{Waveform: simulate.Sine, Amplitude: s.drive, Frequency: driveHz}}}
	}
	if s.spoil != nil {
		s.spoil(&t, s)
	}
	return t, t.Validate()
}

// recording simulates the scene in pixels.
func (s scene) recording(seed uint64) (*track.Recording, error) {
	truth, err := s.truth()
	if err != nil {
		return nil, err
	}
	made := simulate.Make(truth, seed)
	n, nan := len(made.Time), math.NaN()
	rec := &track.Recording{Name: "simulated", Rate: s.rate, RateU: nan, RateOrigin: "setting", Samples: n, JitterRMS: nan, JitterMax: nan}
	rng := rand.New(rand.NewPCG(seed, 77))
	for i, x := range made.Positions {
		pixel := s.pixel
		if i == 0 {
			pixel *= s.uneven
		}
		wander, step, missing := 0.0, s.wander*thermal(s.soft[i])/math.Sqrt(float64(n)/wanderSteps), 0
		for j := range x {
			if s.wander > 0 {
				wander += step * rng.NormFloat64()
			}
			x[j] = (x[j] + wander) / pixel
			if math.IsNaN(x[j]) {
				missing++
			}
		}
		rec.Missing = missing // samples are lost on every axis at once
		rec.Axes = append(rec.Axes, track.Axis{Name: string(s.axes[i]), Header: string(s.axes[i]), Unit: "px", ToMetre: nan, Values: x, Missing: missing})
	}
	return rec, nil
}

// settings states the scene.
func (s scene) settings() (*session.Settings, error) {
	with := func(value, u float64, unit string) string {
		if s.exact {
			u = 0
		}
		if u == 0 {
			return fmt.Sprintf("%.12g %s", value, unit)
		}
		return fmt.Sprintf("%.12g %s +- %.12g %s", value, unit, u, unit)
	}
	text := map[string]string{
		"bead.diameter":      with(s.diameter, carefulDiameter*s.diameter, "m"),
		"medium.temperature": with(s.kelvin, carefulKelvin, "K"),
		"chamber.height":     with(s.height, carefulHeight*s.height, "m"),
		"recording.pixel":    with(s.pixel, carefulPixel*s.pixel, "m"),
		"recording.exposure": fmt.Sprintf("%.15g s", s.exposure),
		"medium.fluid":       "water",
		"fit.drag":           "constant",
		"fit.perpendicular":  "z",
	}
	if !s.unknownNoise {
		text["recording.noise"] = fmt.Sprintf("%.15g m", s.noise)
	}
	if s.drive > 0 {
		text["role"], text["drive.waveform"] = calib.RoleDriven, "sine"
		text["drive.frequency"] = fmt.Sprintf("%g Hz", driveHz)
		text["drive.amplitude"] = with(s.drive, carefulDrive*s.drive, "m")
	}
	if s.free {
		text["role"] = calib.RoleFree
	}
	flags := &session.Settings{}
	for key, t := range text {
		if err := flags.Set(key, "", t, session.FromFlag, key); err != nil {
			return nil, err
		}
	}
	return session.ForTrack(session.Sources{Flags: flags})
}
