package main

import (
	"math"

	"beadwell/calib"
	"beadwell/calib/simulate"
)

// setup is a way of recording that faults are put into.
type setup struct {
	name  string
	scene scene
	near  bool // close to the surface
	apart bool // for the faults that name it
	// companions make of the scene those of the recordings that join the diagnosis.
	companions []func(s scene) scene
}

// freeBead is the same bead with the laser off, for half a second.
func freeBead(s scene) scene {
	s.free, s.drive = true, 0
	s.samples = int(0.5 * s.rate)
	return s
}

// higher is the same bead in the same trap at so many times the height.
func higher(times float64) func(s scene) scene {
	return func(s scene) scene { s.height *= times; return s }
}

// Names of the setups that faults ask for.
const (
	detectorOne   = "detector, x"
	detectorThree = "detector, xyz"
	detectorNear  = "detector, xz near the surface"
	detectorDrive = "detector, x with a driven stage"
	detectorExact = "detector, x, inputs exact, noise fitted"
	cameraOne     = "camera, x"
	cameraTwo     = "camera, xy"
	cameraNear    = "camera, xz near the surface"
	cameraDrive   = "camera, xy with a driven stage"
	detectorFree  = "detector, x with a free bead"
	detectorHigh  = "detector, x at three heights"
	longDetector  = "long detector, x"
	fastBead      = "fast detector, bead of 2 um"
)

// nearHeight is the true height near the surface, 1.4 radii: the drag is 1.9 and 3.6 times that in bulk [m].
const nearHeight = 0.7e-6

// setups of the study.
func setups() []setup {
	// long enough that theory finds the faults, and no longer
	detector := Cell{Ratio: 0.03, Periods: 2000, Noise: 0.02}
	camera := Cell{Ratio: 0.15, Periods: 4000, Exposure: 0.6, Noise: 0.1}
	three, unknown := detector, detector
	three.Periods, unknown.Unknown = 1000, true
	near := func(s scene) scene { s.height = nearHeight; return s }
	driven := func(c Cell, axes string) scene { c.Periods = 6000; s := usual(c, axes); s.drive = 150e-9; return s }
	exact := usual(unknown, "x")
	exact.exact = true
	fast := usual(Cell{Ratio: 0.005, Periods: 5000}, "x")
	fast.diameter, fast.height, fast.inertia = 2e-6, 30e-6, true
	return []setup{
		{name: detectorOne, scene: usual(detector, "x")},
		{name: detectorThree, scene: usual(three, "xyz")},
		{name: detectorNear, scene: near(usual(three, "xz")), near: true},
		{name: detectorDrive, scene: driven(detector, "x")},
		{name: detectorExact, scene: exact},
		{name: cameraOne, scene: usual(camera, "x")},
		{name: cameraTwo, scene: usual(camera, "xy")},
		{name: cameraNear, scene: near(usual(camera, "xz")), near: true},
		{name: cameraDrive, scene: driven(camera, "xy")},
		{name: detectorFree, scene: usual(detector, "x"), companions: []func(scene) scene{freeBead}},
		{name: detectorHigh, scene: near(usual(detector, "x")), near: true, companions: []func(scene) scene{higher(2), higher(8)}},
		{name: longDetector, scene: usual(Cell{Ratio: 0.01, Periods: 4000}, "x"), apart: true},
		{name: fastBead, scene: fast, apart: true},
	}
}

// fault is what is wrong with a statement or with a recording.
type fault struct {
	name string
	code string // of the cause that is to be found, or of the check
	axis string // of a cause of one axis
	// shape tells theory what the fault of a recording looks like; empty where no theory is needed.
	shape shape
	// change makes the fault in what is stated, or in what is true.
	change func(truth, stated *scene)
	// in tells whether the fault can be had in a setup; nil: in all that are not apart.
	in func(s setup) bool
}

// shape is the kind of a fault whose power is worked out.
type shape string

const (
	straightDrift  shape = "drift"
	wanderingDrift shape = "wander"
	narrowLine     shape = "line"
	lostFrames     shape = "lost frames"
)

// Sizes of faults.
const (
	lineShare = 0.3  // rms of the line, in thermal rms
	lineHz    = 50.0 // its frequency
	lostShare = 0.02 // of the frames
)

func (f fault) fits(s setup) bool {
	if f.in == nil {
		return !s.apart
	}
	return f.in(s)
}

// wrongStatements are the faults that the cross-check has to find and the diagnosis to name.
func wrongStatements() []fault {
	notDriven := func(s setup) bool { return s.scene.drive == 0 && !s.apart }
	return []fault{
		{name: "length scale 6 % too large", code: calib.CauseScale, change: func(_, stated *scene) { stated.pixel *= 1.06 }},
		{name: "length scale 6 % too small", code: calib.CauseScale, change: func(_, stated *scene) { stated.pixel *= 0.94 }},
		{name: "length scale of x 6 % off", code: calib.CauseScaleOne, axis: "x", change: func(truth, _ *scene) { truth.uneven = 0.94 },
			in: func(s setup) bool { return len(s.scene.axes) > 1 }},
		{name: "temperature 8 K too low", code: calib.CauseTemperature, change: func(_, stated *scene) { stated.kelvin -= 8 }},
		{name: "trap heated by 8 K, not stated", code: calib.CauseHeating, change: func(truth, _ *scene) { truth.heating = 8 },
			in: func(s setup) bool { return s.name == detectorFree }},
		{name: "bead diameter 10 % too small", code: calib.CauseDiameter, change: func(_, stated *scene) { stated.diameter *= 0.9 }},
		{name: "viscosity 15 % too low", code: calib.CauseViscosity, change: func(truth, _ *scene) { truth.thickness = 1.15 }},
		{name: "height stated twice as large", code: calib.CauseHeight, change: func(_, stated *scene) { stated.height *= 2 },
			in: func(s setup) bool { return s.near }},
		{name: "exposure stated 0, full frame", code: calib.CauseExposure, change: func(truth, stated *scene) { truth.exposure, stated.exposure = 1/truth.rate, 0 }},
		{name: "rate stated twice too high", code: calib.CauseRate, change: func(truth, stated *scene) {
			truth.exposure /= 2
			stated.exposure = truth.exposure
			stated.rate *= 2
		}, in: notDriven},
		{name: "rate stated twice too low", code: calib.CauseRate, change: func(truth, stated *scene) {
			truth.exposure /= 2
			stated.exposure = truth.exposure
			stated.rate /= 2
		}, in: notDriven},
		{name: "milliseconds taken for seconds", code: calib.CauseRate, change: func(truth, stated *scene) {
			truth.exposure = 0
			stated.exposure = 0
			stated.rate /= 1000
		}, in: notDriven},
		{name: "noise of 0.3 rms stated as 0.1", code: calib.CauseNoise, change: func(truth, stated *scene) {
			truth.noise, stated.noise = 0.3*thermal(1), 0.1*thermal(1)
		}, in: func(s setup) bool { return !s.scene.unknownNoise && !s.apart }},
		{name: "slow drift of one rms, a random walk", code: calib.CauseDrift, change: func(truth, _ *scene) { truth.wander = 1 }},
		{name: "inertia of the liquid ignored", code: calib.CauseInertia, change: func(_, stated *scene) { stated.inertia = false },
			in: func(s setup) bool { return s.name == fastBead }},
		{name: "amplitude of the stage 6 % too large", code: calib.CauseStage, change: func(_, stated *scene) { stated.drive *= 1.06 },
			in: func(s setup) bool { return s.scene.drive > 0 }},
	}
}

// spoiltRecordings are the faults that a check of the recording has to find.
func spoiltRecordings() []fault {
	spoiling := func(f func(t *simulate.Truth, s scene)) func(truth, stated *scene) {
		return func(truth, _ *scene) { truth.spoil = f }
	}
	event := func(kind simulate.EventKind, at float64) func(truth, stated *scene) {
		return spoiling(func(t *simulate.Truth, s scene) {
			e := simulate.Event{Kind: kind, Time: at * float64(t.Samples) / t.Rate}
			if kind == simulate.SecondBead { // a pair: half a radius off centre along x, held more stiffly, with more drag
				e.Offset, e.Stiffness, e.Drag = make([]float64, len(t.Axes)), 1.2, 1.4
				e.Offset[0] = 0.25 * s.diameter
			}
			t.Events = append(t.Events, e)
		})
	}
	in := func(names ...string) func(s setup) bool {
		return func(s setup) bool {
			for _, n := range names {
				if s.name == n {
					return true
				}
			}
			return false
		}
	}
	all := in(detectorOne, detectorThree, cameraOne, cameraTwo, cameraNear)
	return []fault{
		{name: "drift of one rms, straight", code: "slow-drift", shape: straightDrift, in: all, change: spoiling(func(t *simulate.Truth, s scene) {
			for i := range t.Axes {
				t.Axes[i].Drift = thermal(s.soft[i])
			}
		})},
		{name: "wander of one rms", code: "slow-wander", shape: wanderingDrift, in: all, change: func(truth, _ *scene) { truth.wander = 1 }},
		{name: "stuck bead from 0.6", code: "held-bead", in: all, change: event(simulate.Stuck, 0.6)},
		{name: "second bead at 0.2", code: "jump", in: all, change: event(simulate.SecondBead, 0.2)},
		{name: "escape at 0.65", code: "lost-bead", in: all, change: event(simulate.Escape, 0.65)},
		{name: "clipping at 2.5 rms", code: "rail", in: all, change: spoiling(func(t *simulate.Truth, _ scene) { t.Faults.Rail = 2.5 * thermal(1) })},
		{name: "2 % of frames lost, time stamps kept", code: "dropped-samples", in: all, change: spoiling(func(t *simulate.Truth, _ scene) { t.Faults.Blank = lostShare })},
		{name: "2 % of frames lost without a trace", code: "rough-steps", shape: lostFrames, in: in(longDetector, detectorOne), change: spoiling(func(t *simulate.Truth, _ scene) { t.Faults.Dropped = lostShare })},
		{name: "line of 50 Hz, 0.3 rms", code: "tone", shape: narrowLine, in: all, change: spoiling(func(t *simulate.Truth, s scene) {
			for i := range t.Axes {
				t.Axes[i].Lines = []simulate.Line{{Frequency: lineHz, Amplitude: lineShare * math.Sqrt2 * thermal(s.soft[i])}}
			}
		})},
	}
}
