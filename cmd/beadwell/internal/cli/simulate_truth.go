package cli

import (
	"math"

	"beadwell/calib/quantity"
	"beadwell/calib/session"
	"beadwell/calib/simulate"
)

// simulation is a simulated recording as its truth file holds it.
type simulation struct {
	Simulated bool           `json:"simulated"` // always true: no instrument made this
	Command   []string       `json:"command"`
	Seed      uint64         `json:"seed"`
	Bead      simulatedBead  `json:"bead"`
	Axes      []simulatedFor `json:"axes"`
	Truth     simulate.Truth `json:"truth"`
}

// simulatedBead is the bead and its surroundings.
type simulatedBead struct {
	Diameter    float64  `json:"diameter_m,omitempty"` // of a background without a bead there is none
	Fluid       string   `json:"fluid,omitempty"`
	Temperature float64  `json:"temperature_K"`
	Viscosity   float64  `json:"viscosity_Pa_s"`
	Height      *float64 `json:"height_m"` // null far from walls
}

// simulatedFor is the truth of an axis in the terms of a calibration.
type simulatedFor struct {
	Name       string  `json:"name"`
	Stiffness  float64 `json:"stiffness_N_per_m"` // 0 without a trap
	Drag       float64 `json:"drag_N_s_per_m,omitempty"`
	WallFactor float64 `json:"wall_factor,omitempty"`
}

// mostSamples keeps a recording and its text in the memory of a small computer.
const mostSamples = 20_000_000

// newSimulation turns the command line into the truth of a recording.
func newSimulation(o simulateOptions, settings *session.Settings) (*simulation, error) {
	role, _ := settings.Lookup("role", "")
	stiffness, err := parseByAxis("stiffness", o.stiffness, quantity.Stiffness)
	if err != nil {
		return nil, err
	}
	if trapped := role.Word == "trapped" || role.Word == "driven"; trapped != (len(stiffness) > 0) {
		return nil, usageError("a trapped or driven bead needs --stiffness '52 pN/um'; a free one and a background have none",
			"--role %s and --stiffness %q do not go together", role.Word, o.stiffness)
	}
	axes, err := o.axesOf(stiffness)
	if err != nil {
		return nil, err
	}
	input := newDragInput
	if role.Word == "background" {
		input = newLiquid
	}
	in, err := input(settings, measure{math.NaN(), math.NaN()})
	if err != nil {
		return nil, err
	}
	p := &simulation{Simulated: true, Seed: o.seed, Bead: simulatedBead{Diameter: in.diameter.value, Fluid: in.fluid,
		Temperature: in.temperature.value, Viscosity: in.viscosity.value}}
	if err := p.addTiming(o, settings); err != nil {
		return nil, err
	}
	for _, axis := range axes {
		if err := p.addAxis(axis, role.Word, stiffness.of(axis), in, settings); err != nil {
			return nil, err
		}
	}
	for _, step := range []func() error{
		func() error { return p.addDecoration(o) },
		func() error { return p.addDetector(o, in, settings) },
		func() error { return p.addStage(role.Word, settings) },
		func() error { return p.addEvents(o) },
	} {
		if err := step(); err != nil {
			return nil, err
		}
	}
	if err := p.Truth.Validate(); err != nil {
		return nil, usageError("see beadwell simulate --help", "%w", err)
	}
	return p, nil
}

// axesOf returns the recorded axes: those that the stiffness names, or those of --axes.
func (o simulateOptions) axesOf(stiffness byAxis) ([]string, error) {
	if len(stiffness) == 0 || hasAll(stiffness) {
		return parseAxes(o.axes)
	}
	var axes []string
	for _, axis := range spatialAxes {
		if _, named := stiffness[axis]; named {
			axes = append(axes, axis)
		}
	}
	return axes, nil
}

func (p *simulation) addTiming(o simulateOptions, settings *session.Settings) error {
	rate := measured(settings, "recording.rate").value
	if rate == 0 {
		return usageError("state it: --rate '2 kHz'", "the sampling rate is not given, and has no default")
	}
	duration, err := parseOne("duration", o.duration, quantity.Time)
	if err != nil {
		return err
	}
	samples := math.Round(duration * rate)
	if !(samples >= 1 && samples <= mostSamples) {
		return usageError("change --duration or --rate", "%g samples: from 1 to %d can be made", samples, mostSamples)
	}
	p.Truth.Samples, p.Truth.Rate = int(samples), rate
	return nil
}

// addAxis adds an axis with its motion, noise and exposure.
func (p *simulation) addAxis(name, role string, stiffness float64, in dragInput, settings *session.Settings) error {
	height := measure{math.Inf(1), 0}
	if h, ok := settings.Lookup("chamber.height", ""); ok && h.Word == "" {
		height.value = h.Value.SI
		p.Bead.Height = &height.value
	}
	normal, _ := settings.Lookup("fit.perpendicular", "")
	axis, bead := simulate.Axis{Fixed: true}, simulatedFor{Name: name, Stiffness: stiffness}
	if in.diameter.value > 0 {
		row, err := in.row(height, name == normal.Word)
		if err != nil {
			return err
		}
		physical := simulate.Physical{Stiffness: stiffness, Radius: in.diameter.value / 2, Viscosity: in.viscosity.value,
			WallFactor: row.factor.value, Temperature: in.temperature.value}
		bead.Drag, bead.WallFactor = physical.Drag(), row.factor.value
		if role != "background" {
			axis = physical.Axis()
		}
	}
	axis.Name, axis.Perpendicular = name, name == normal.Word
	noise, _ := settings.Lookup("recording.noise", name)
	axis.Noise = noise.Value.SI
	exposure, _ := settings.Lookup("recording.exposure", name)
	if len(p.Truth.Axes) > 0 && exposure.Value.SI != p.Truth.Exposure {
		return usageError("write one --exposure for all axes", "--exposure differs between axes, which cannot be simulated")
	}
	p.Truth.Exposure = exposure.Value.SI
	p.Truth.Axes = append(p.Truth.Axes, axis)
	p.Axes = append(p.Axes, bead)
	return nil
}

// addDecoration adds centre, drift, lines and anharmonicity.
func (p *simulation) addDecoration(o simulateOptions) error {
	centre, err := p.parseFor("centre", o.centre, quantity.Length)
	if err != nil {
		return err
	}
	drift, err := p.parseFor("drift", o.drift, quantity.Length)
	if err != nil {
		return err
	}
	quartic, err := parseOne("quartic", o.quartic, quantity.Dimensionless)
	if err != nil {
		return err
	}
	lines, err := parseLines(o.lines)
	if err != nil {
		return err
	}
	for i := range p.Truth.Axes {
		a := &p.Truth.Axes[i]
		a.Mean, a.Drift, a.Lines, a.Quartic = centre.of(a.Name), drift.of(a.Name), lines, quartic
	}
	return nil
}

// addDetector adds frequency-dependent drag, the photodiode, the mixing of axes and the faults.
func (p *simulation) addDetector(o simulateOptions, in dragInput, settings *session.Settings) error {
	if kind, _ := settings.Lookup("fit.drag", ""); kind.Word == "frequency-dependent" {
		density := measured(settings, "bead.density").value
		if density == 0 || !(in.density.value > 0) {
			return usageError("add --bead-density '1.05 g/cm3', and --fluid-density beside a --viscosity", "--drag frequency-dependent needs the densities of bead and fluid")
		}
		p.Truth.Hydrodynamics = &simulate.Hydrodynamics{Radius: in.diameter.value / 2, Viscosity: in.viscosity.value, Density: in.density.value, BeadDensity: density}
		if p.Bead.Height != nil {
			p.Truth.Hydrodynamics.Height = *p.Bead.Height
		}
	}
	alpha, hasAlpha := settings.Lookup("detector.alpha", "")
	f3db, hasF3dB := settings.Lookup("detector.f3db", "")
	if hasAlpha != hasF3dB {
		return usageError("give both, or neither", "--alpha and --f3db describe a photodiode together")
	}
	if alpha.Word != "" || f3db.Word != "" {
		return usageError(`give numbers, such as --alpha 0.25 --f3db "8 kHz"`, "--alpha and --f3db of a simulation cannot be fitted")
	}
	if hasAlpha {
		p.Truth.Photodiode = &simulate.Photodiode{Alpha: alpha.Value.SI, F3dB: f3db.Value.SI}
	}
	var err error
	if p.Truth.Rotation, err = parseAngle(o.rotation); err != nil {
		return err
	}
	share, err := parseOne("cross-talk", o.crossTalk, quantity.Fraction)
	if err != nil {
		return err
	}
	if share != 0 {
		p.Truth.Leaks = []simulate.Leak{{From: 0, Into: 1, Share: share}}
	}
	p.Truth.Faults, err = o.parseFaults()
	return err
}

// addStage adds the moving stage of a driven recording.
func (p *simulation) addStage(role string, settings *session.Settings) error {
	waveform, hasWaveform := settings.Lookup("drive.waveform", "")
	amplitude, hasAmplitude := settings.Lookup("drive.amplitude", "")
	frequency, hasFrequency := settings.Lookup("drive.frequency", "")
	switch {
	case role != "driven" && (hasWaveform || hasAmplitude || hasFrequency):
		return usageError("add --role driven", "a drive has no effect with --role %s", role)
	case role != "driven":
		return nil
	case !hasWaveform || !hasAmplitude || !hasFrequency:
		return usageError("give --drive-waveform, --drive-amplitude and --drive-frequency", "--role driven needs the motion of the stage")
	}
	p.Truth.Stage = &simulate.Stage{Parts: []simulate.Drive{
		{Waveform: simulate.Waveform(waveform.Word), Amplitude: amplitude.Value.SI, Frequency: frequency.Value.SI}}}
	return nil
}

func (p *simulation) addEvents(o simulateOptions) (err error) {
	p.Truth.Events, err = o.parseEvents(len(p.Truth.Axes), p.Bead.Diameter/2)
	return err
}
