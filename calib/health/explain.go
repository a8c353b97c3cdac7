package health

// caution stands behind every remedy that touches the laser.
const caution = " If this means to touch the laser or the beam path: trained and authorised users only, with eyewear for the wavelength and power and the beam enclosed; local laser-safety rules and the laser safety officer decide."

// Explanation is the long form of a code.
type Explanation struct {
	Code  string // as in Check.Code
	Title string // as in Check.Name
	Long  string // what is looked at, when it is doubtful and when bad, what causes it, what to do

	unit   string // of the value
	reason string // one sentence
}

// Codes returns the explanations of all codes in the order in which Run makes the
// checks.
func Codes() []Explanation {
	out := make([]Explanation, len(explanations))
	copy(out, explanations)
	return out
}

// explained returns the explanation of a code of this package.
func explained(code string) Explanation {
	for _, e := range explanations {
		if e.Code == code {
			return e
		}
	}
	return Explanation{Code: code, Title: code}
}

var explanations = []Explanation{
	{
		Code: "dropped-samples", Title: "missing samples", unit: "1",
		reason: "What happened in a gap is unknown, and a fit that ignores gaps takes two intervals for one.",
		Long: `Looked at: the share of samples of the regular time grid that are missing. Doubtful above 0.05 %, bad above 20 %.
The spectrum is then fitted by the likelihood of the samples that are there, which steps over gaps without bias; the precision falls with what is lost. Gaps that have to do with the motion, such as frames in which a fast bead was not found, do bias the result.
What to do: record slower, with a smaller field of view, or to a faster disk.`,
	},
	{
		Code: "uneven-clock", Title: "scatter of the time stamps", unit: "1",
		reason: "The models take samples as evenly spaced; a scatter of the true times adds apparent noise.",
		Long: `Looked at: the root mean square of the time stamps about an even grid, over the sampling interval. Doubtful above 10 %, bad above 35 %. Stamps that are rounded to a third of the interval have 10 %, those rounded to a whole interval 29 %.
Stamps given by software scatter even when the camera itself is regular. If only the stamps are coarse, state the sampling rate.
What to do: trigger the camera or the digitiser by a clock.`,
	},
	{
		Code: "repeated-stamps", Title: "samples that came twice", unit: "1",
		reason: "A program that writes samples twice may have lost others.",
		Long: `Looked at: the share of samples that came again with the time stamp of the one before and were left out. Doubtful above 0.1 %, bad above 5 %.
What to do: find out why the recording program does this, and whether frames were lost in exchange.`,
	},
	{
		Code: "rail", Title: "clipping", unit: "1",
		reason: "A clipped signal hides the widest excursions: the variance is too small and the trap looks too stiff.",
		Long: `Looked at: the share of samples that stand exactly at the lowest or the highest value. Values that are on no grid never meet by chance; on a grid the outermost level of a smooth tail holds fewer samples than the next one. Doubtful above 0.01 %, bad above 0.4 %, which is a limit at 2.65 standard deviations on both sides and takes more than 1 % off the variance.
What to do: more range (a lower gain, a larger field), with the bead in the centre of the detector.`,
	},
	{
		Code: "coarse-steps", Title: "coarse values", unit: "1",
		reason: "Rounding adds variance that is not motion, a twelfth of the squared step.",
		Long: `Looked at: the common spacing of all values, over the rms of the positions. Doubtful above 0.5, where rounding adds 2 % to the variance; bad above 1.5, where it adds 19 %.
Whole-pixel positions, too few digits in the file and an unused range of the digitiser make coarse values. The noise of rounding is white, and the fit of a noise floor takes most of it up, only while the bead moves by more than a step from sample to sample.
When the values are fine, a regular pattern in their distribution is looked for, with a period below 1.4 times the rms, as tracking methods make that prefer the centres of pixels. Doubtful above 0.05, bad above 0.5 (the mean of a unit vector that turns once in each period).
What to do: write more digits, use more of the digitiser's range, or track with sub-pixel resolution.`,
	},
	{
		Code: "frozen-samples", Title: "samples that repeat", unit: "1",
		reason: "A repeated sample is a lost one that hides; steps of zero and of double length distort the fast part of the spectrum.",
		Long: `Looked at: the share of samples that are exactly equal to the one before, beyond what rounding to the grid of the values makes. Doubtful above 0.1 %, bad above 5 %.
What to do: find out whether the program writes the old value when a new one is late.`,
	},
	{
		Code: "lost-bead", Title: "escape", unit: "1",
		reason: "A bead outside the trap diffuses freely and knows nothing of its stiffness.",
		Long: `Looked at: whether the position reaches beyond 9 times the rms of all that went before (a fifth of the record at least), and from there on wanders as a free bead does. Always bad. It needs no fit.
The longest stretch before it can be calibrated by itself.
What to do: a stiffer trap holds the bead longer; the escape rate falls exponentially with the depth of the trap.` + caution,
	},
	{
		Code: "held-bead", Title: "bead held fast", unit: "1",
		reason: "A bead that sticks to the surface or to another does not show the stiffness of the trap.",
		Long: `Looked at: whether in any stretch of the record the variance is less than a third of that elsewhere, and what is left looks like noise rather than slow motion. Always bad.
A bead that is stuck for the whole record leaves white noise, or noise and drift: there is nothing to compare it with, and the corner frequency cannot be found.
What to do: use the part in which it moved; raise the bead from the surface, or passivate the surface.`,
	},
	{
		Code: "jump", Title: "jump of the mean", unit: "1",
		reason: "A second bead, or contact with the surface, changes the trap; a step in the mean adds variance that is not thermal.",
		Long: `Looked at: a sudden step in the mean position, over the rms, fitted together with a straight line. It has to be beyond what the bead makes anywhere along the record, and sudden: short stretches on either side must differ by as much. Doubtful above 0.15, bad above 0.5.
A second bead that falls into the trap shifts the mean and mostly changes the variance as well. A knock against the microscope shifts the mean alone.
What to do: use the part before, or record again.`,
	},
	{
		Code: "slow-drift", Title: "drift", unit: "1",
		reason: "Drift adds variance that is not thermal wherever it is not taken off.",
		Long: `Looked at: the change of the mean along a straight line over the whole record, over the rms, beyond what the bead's own slow fluctuations make. Doubtful above 0.25; bad when it is larger than 1 by three standard deviations. The estimates allow for a straight line, so that a small drift does no harm by itself; large ones are seldom straight.
What to do: let the microscope settle, shield it from air currents and heat; or record for a shorter time.`,
	},
	{
		Code: "slow-wander", Title: "slow wander", unit: "1",
		reason: "Slow motion of stage or laser adds variance that is not thermal, and no straight line takes it off.",
		Long: `Looked at: the waves of one to four and a half periods over the record, about a straight line, against those of the fitted process (a Fisher test). The value is their rms beyond expectation, over that of the bead. Doubtful above 0.1 (1 % of the variance), bad above 0.3 (9 %).
What to do: fit above the frequencies of the wander, or cut the record to its calm part. Shield the microscope and its beam path from air currents and changes of the temperature.` + caution,
	},
	{
		Code: "unsteady-motion", Title: "change of the variance", unit: "1",
		reason: "One stiffness cannot describe a trap that changed during the record.",
		Long: `Looked at: the ratio of the variance in any stretch to that in the rest of the record, each about its own mean. It has to be beyond chance for the correlated samples, whatever the stretch. Doubtful above 1.15, bad above 1.6.
A second bead, debris, a change of the laser power and contact with the surface do this.
What to do: calibrate the parts apart; look at the sample.` + caution,
	},
	{
		Code: "rough-steps", Title: "steps that are too large", unit: "1",
		reason: "Lost samples that leave no gap, and single wrong positions, distort the fast part of the spectrum and the noise.",
		Long: `Looked at: the excess kurtosis of the steps from each sample to the next, which is 0 for a trapped bead whatever its trap. If a share p of the steps span two intervals it is about 3p where the corner frequency is small against the sampling rate, and vanishes where it is not. Doubtful beyond 3.3 standard deviations and above 0.01, on one axis or on all of them together; bad above 5. A loss of 2 % without a trace shows in 250000 samples of one axis at fc/fs = 0.01, and above fc/fs = 0.1 not even in a million: there only time stamps or frame numbers tell.
What to do: compare the frame numbers of camera and file, record with time stamps, look at the largest steps in the track.`,
	},
	{
		Code: "not-gaussian", Title: "shape of the distribution", unit: "1",
		reason: "The stiffness from the variance holds for a harmonic trap and a linear detector.",
		Long: `Looked at: skewness and excess kurtosis of the positions, with the effective number of samples for each. In a harmonic trap both are 0. A quartic part of the potential makes the stiffness from the variance wrong by half the excess kurtosis. Doubtful above 0.06 in kurtosis or 0.08 in skewness, bad above 0.8 or 0.6.
Negative: the trap steepens or the detector saturates. Positive: the trap softens, or single positions are wrong. Skewed: the detector is not centred, or a wall is near.
What to do: centre the bead on the detector; use a stiffer trap.` + caution,
	},
	{
		Code: "tone", Title: "narrow line", unit: "1",
		reason: "A vibration or mains pickup adds variance that is not thermal.",
		Long: `Looked at: the largest bin of the periodogram against its neighbours, and the lines that the fit took out; the value is the amplitude over the rms. Doubtful above 0.06 (0.2 % of the variance), bad above 0.7 (a quarter).
What to do: find the source by its frequency. 50 or 60 Hz and multiples are the mains; fans, pumps and chillers have their own.`,
	},
	{
		Code: "short-record", Title: "length of the record", unit: "1",
		reason: "The precision is set by the number of independent positions, not by that of samples.",
		Long: `Looked at: duration times corner frequency. Doubtful when it is below 30 by three standard uncertainties of the corner, bad below 8. The relative uncertainty of the corner frequency is at best one over the square root of pi times this number, 10 % at 30.
What to do: record longer, or use a stiffer trap, which moves through more periods in the same time.` + caution,
	},
	{
		Code: "long-exposure", Title: "motion blur", unit: "1",
		reason: "The correction for blur rests on the exposure time and the relaxation time; where it is large, so is their error in the result.",
		Long: `Looked at: the share of the variance that is left when each position is an average over the exposure. Doubtful below 0.15, where the exposure is two relaxation periods or 12 relaxation times, bad below 0.07.
What to do: a shorter exposure with more light, or a softer trap.` + caution,
	},
	{
		Code: "slow-sampling", Title: "sampling rate", unit: "1",
		reason: "When neighbouring samples no longer know of each other, the corner frequency cannot be seen.",
		Long: `Looked at: the standard uncertainty of the logarithm of the corner frequency that samples at this rate allow at best, where the corner is above a fifth of the sampling rate and there are a thousand samples. Doubtful above 0.6, bad above 1.5; bad, too, when a thousand samples or more do not know of each other at all, as is the case without a moving bead. Aliasing is part of the model, so that a corner near or above the sampling rate is no harm as long as the record is long enough.
What to do: sample faster, or use a softer trap.` + caution,
	},
	{
		Code: "odd-spectrum", Title: "fit of the spectrum", unit: "1",
		reason: "Where the model does not describe the spectrum, its parameters do not describe the trap.",
		Long: `Looked at: the p-value of the fitted spectrum. Doubtful below 1e-4. In a long record a misfit of a percent is beyond chance, so that the size of the residuals counts more than the p-value.
What to do: look at the residuals. High frequencies point to the detector, the inertia of the fluid or a wrong exposure; low ones to vibration or drift.`,
	},
	{
		Code: "axes-mixed", Title: "cross-talk of the axes", unit: "1",
		reason: "If one axis shows part of the other's motion, both stiffnesses are mixtures.",
		Long: `Looked at: the correlation coefficient of two axes at equal times, with the number of effective samples. Doubtful above 0.06 beyond chance, bad above 0.5. Narrow lines that stand in both axes, such as mains pickup, are left out.
Cross-talk of the detector does this, and so does a detector that is turned against the axes of a trap that is not round.
What to do: turn the detector or the coordinates; check wiring and alignment.` + caution,
	},
}
