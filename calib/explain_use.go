package calib

// Codes of the findings of forces.
const (
	CodeBeyondLinear    = "beyond-linear-range"
	CodeVerdictIgnored  = "verdict-overruled"
	CodeOldCentre       = "centre-of-calibration"
	CodeOtherLengthUnit = "other-length-scale"
)

// UseExplanations lists the codes that plans and forces add to those of a calibration.
func UseExplanations() []Explanation {
	return []Explanation{
		{CodeSlowRate, "the corner frequency is above half the sampling rate", `The correlation that is left from one sample to the next is exp(-2 pi fc/fs). The drag route reads the corner frequency from it: with fc at half the rate 4 % is left, with fc at the rate 0.2 %. The amplitude route does not suffer, as long as the noise is known.
What to do: sample faster, or plan for less stiffness.`},
		{CodeBlurred, "the exposure averages the motion", `A sample is the mean position over its exposure W, which keeps the share 2/a - 2(1 - exp(-a))/a^2 of the variance, a = 2 pi fc W. The correction is exact, but it rests on the exposure and the corner frequency, and their uncertainties enter the stiffness.
What to do: expose for a shorter time with more light, and state the uncertainty of the exposure.`},
		{CodeFloor, "the inputs limit the uncertainty", `A longer recording makes the statistical uncertainty smaller as one over the root of its duration, and leaves that of bead, temperature, height and length scale as it is. From the duration named on, the combined uncertainty is within 5 % of what the inputs alone leave.
What to do: measure the input with the largest share better; the plan names it.`},
		{CodeCloseSurface, "the bead is close to a surface", `Below two radii the drag rises steeply with falling height: by 38 % at two radii, by a factor of 2.3 at 1.1. An uncertain height then dominates the drag route.
What to do: trap higher, or measure the height; the amplitude route does not need it.`},
		{CodeDriftMatters, "how much drift matters", `The straight line through the record is removed. What a drift has beside it adds its mean square to the variance; the amplitude named is that at which this is the statistical uncertainty of the amplitude route.
What to do: let the stage settle, or cut a long recording into several.`},
		{CodeExactInputs, "inputs without an uncertainty", `A bead diameter, a temperature, a height or a length scale is never exact. One that is stated without its uncertainty is taken as exact, so that the combined uncertainty of the stiffness is too small.
What to do: state each with its standard uncertainty.`},
		{CodeNoiseDominant, "the noise exceeds the motion", `The localisation noise has a larger variance than the motion that is recorded. The motion is then the small difference of two large numbers.
What to do: use more light or a brighter bead, or plan for less stiffness, which moves more.`},
		{CodeNoiseLearned, "the recording tells the noise better than it is stated", `A stated noise with an uncertainty is combined with what the recording itself says of it. In a short recording the statement counts, and its uncertainty is part of the inputs. A long one tells the noise better, and the same uncertainty becomes a statistical one, that of repeated recordings. So the statistical part may rise with the duration, while the combined one falls.
What to do: compare durations by the combined uncertainty; a longer background recording makes the noise itself better known.`},
		{CodeExposureGrows, "the exposure is too uncertain for long recordings", `What an error of the exposure does to the fit does not become smaller with the duration, while the weights of the combination, which do not know of it, move towards the recording. A longer recording can then give a larger combined uncertainty.
What to do: measure the exposure better, or expose for a shorter time; the share of the exposure in the budget says how much it counts.`},
		{CodeBeyondLinear, "displacements beyond the range that was seen", `The calibration sees the potential only as far as thermal motion carries the bead, three to four standard deviations. The named range is that over which the histogram agrees with a parabola. Further out the force is stiffness times displacement only if the trap is still linear there, which this calibration cannot tell.
What to do: move the stage, or drag the bead by a known flow, and see whether the displacement grows in proportion.`},
		{CodeVerdictIgnored, "a verdict was overruled", `The calibration is inconsistent or the recording unfit, and the forces were computed all the same.
What to do: calibrate again before the forces are used.`},
		{CodeOldCentre, "the centre is that of the calibration", `The centre of the trap is the mean position of the recording that was calibrated. What stage and laser have drifted since then looks like a constant force.
What to do: record some seconds without a force, and take their mean as the centre.`},
		{CodeOtherLengthUnit, "another length scale than the calibration", `The length of a pixel or of a unit of the detector differs from that of the calibration. If both recordings were made with the same magnification one of them is wrong, and so are the forces.
What to do: state the same, unless the magnification was changed on purpose.`},
	}
}
