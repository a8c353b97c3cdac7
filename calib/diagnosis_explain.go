package calib

// causeExplanations are the long forms of the causes.
var causeExplanations = []Explanation{
	{CauseScale, "cause: the length scale", `One wrong length per pixel or per volt changes every recorded length alike: the variance and the measured diffusion coefficient by twice as much, the corner frequency not at all. On one axis this is the same pattern as a wrong diameter or viscosity; with a perpendicular axis near the surface it is not quite.
What to do: ` + measurements[CauseScale] + `. Beware of binning, of a changed tube lens or zoom, and of nanometres taken for micrometres.`},
	{CauseScaleOne, "cause: the length scale of one axis", `The routes agree on the other axes and not on this one. Bead, liquid and temperature are common to all axes, so the fault is in what is not: the scale of this axis (a tilted camera, pixels that are not square, another sensitivity of the detector).
What to do: ` + measurements[CauseScaleOne] + `.`},
	{CauseTemperature, "cause: the temperature", `The temperature acts twice: on kT, by 0.3 % a kelvin, and on the viscosity of water, by 2.3 % a kelvin the other way. Together the expected diffusion coefficient rises by 2.6 % a kelvin. The trap is warmer than the chamber: the laser and the objective heat it.
What to do: ` + measurements[CauseTemperature] + `.` + caution},
	{CauseViscosity, "cause: the viscosity", `The drag goes with the viscosity, the amplitude of the motion does not. Sugar, glycerol, protein, salt and evaporation all raise it.
What to do: ` + measurements[CauseViscosity] + `.`},
	{CauseDiameter, "cause: the bead diameter", `The drag goes with the diameter, and near a surface with more than its first power. Data sheets give the mean of a batch; single beads scatter about it, and pairs of beads are not rare.
What to do: ` + measurements[CauseDiameter] + `.`},
	{CauseHeight, "cause: the height", `A surface raises the drag along it by 13 % at five radii, by 38 % at two, and across it by twice as much and more. Axes parallel and perpendicular to the surface therefore tell a wrong height from all else. A height read from the focus drive needs the focal shift between glass and water, about a fifth of the way.
What to do: ` + measurements[CauseHeight] + `.`},
	{CauseExposure, "cause: the exposure", `Averaging over the exposure takes away variance, and most at high frequencies, which bends the spectrum: the shape tells an exposure from a scale. An exposure of 0 for a camera is the most frequent slip.
What to do: ` + measurements[CauseExposure] + `.`},
	{CauseNoise, "cause: the localisation noise", `Noise of the tracking adds a floor to the spectrum and its square to the variance. Where the noise is stated and is another, the fit puts the difference into the motion of the bead.
What to do: ` + measurements[CauseNoise] + `; or leave the noise out, so that it is fitted.`},
	{CauseDrift, "cause: a slow drift", `A drift of the stage or the focus adds power at the lowest frequencies alone. The straight part of it is always taken out; what wanders is not.
What to do: ` + measurements[CauseDrift] + `.`},
	{CauseInertia, "cause: the inertia of the liquid", `The drag grows with frequency, and a fit with constant drag to a wide band is low in corner frequency and in diffusion coefficient.
What to do: ` + measurements[CauseInertia] + `.`},
	{CauseStage, "cause: the amplitude of the stage", `The length scale that a moving stage gives goes with the amplitude that is stated of its motion. A piezo stage moves less at high frequency than at rest, and its own sensor may not be where the bead is.
What to do: ` + measurements[CauseStage] + `.`},
	{CauseHeating, "cause: heating by the laser", `The recording of the free bead, with the laser off, agrees with what is stated, and the trapped one does not: the trap is warmer or colder than stated, by the light that water, bead and surfaces absorb. Water takes up more at 1064 nm than at 800 nm.
What to do: ` + measurements[CauseHeating] + `. State the rise with laser.heating and laser.power.` + caution},
	{CauseRate, "cause: the sampling rate", `A corner frequency is measured in units of the sampling rate. If that is wrong by two (every second frame dropped, a header that was copied) or by a thousand (milliseconds taken for seconds), the corner frequency in hertz is wrong by as much, and no length is. Only these factors are tried: any other would look like a viscosity.
What to do: ` + measurements[CauseRate] + `.`},
}
