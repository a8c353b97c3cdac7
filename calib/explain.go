package calib

import "beadwell/calib/health"

// Explanation is the long form of the code of a finding.
type Explanation struct{ Code, Title, Long string }

// Explanations lists all codes: those of the calibration first, then the causes of a
// disagreement, those of plans and forces, and of the checks of the recording.
func Explanations() []Explanation {
	all := append(append([]Explanation(nil), explanations...), causeExplanations...)
	all = append(all, UseExplanations()...)
	for _, e := range health.Codes() {
		all = append(all, Explanation{e.Code, e.Title, e.Long})
	}
	return all
}

// caution stands where a remedy touches the laser.
const caution = " If this means to touch the laser or the beam path: trained and authorised users only, with eyewear for the wavelength and power and the beam enclosed; local laser-safety rules and the laser safety officer decide."

var explanations = []Explanation{
	{CodeInconsistent, "the routes disagree", `The stiffness by drag (corner frequency times 2 pi times the drag of the bead) and the stiffness by amplitude (kT over the variance) are two routes to one number. They fail for different reasons: drag needs bead diameter, viscosity and height; amplitude needs the length scale and is spoilt by noise and blur. When they differ by more than the stated uncertainties allow (family-wise p below 0.005), nothing is adopted.
What to do: check the length scale (pixel size, sensitivity), the temperature, the bead's diameter and the height, in the order of how surely each is known. A free bead (laser off) tests drag and length scale together; a second height tests the wall.` + caution},
	{CodeAssumed, "a setting was assumed", `A setting that changes the answer was not stated, and a default was used. The result marks it as assumed. Temperature changes the viscosity of water by 2.3 % a kelvin, and with it the stiffness by drag.
What to do: state it on the command line or in session.toml.`},
	{CodeNoHeight, "the height was not stated", `A surface near the bead raises its drag: parallel to it by 6 % at ten radii, 13 % at five, 38 % at two. Without a height the drag is taken as that far from any surface, and the stiffness by drag is too low if one is near. The amplitude route does not need the height.
What to do: state the height of the bead's centre above the nearer surface, or "far".`},
	{CodeNoExposure, "the exposure was not stated", `A camera averages the position over its exposure, which lowers the variance: by 3 % when 2 pi fc W is 0.1, by 26 % when it is 1. Without an exposure every sample is taken as instantaneous, which is right for a fast detector and wrong for a camera.
What to do: state the exposure; 0 for a detector.`},
	{CodeLine, "a narrow line was removed", `The spectrum has a value that chance does not make more than once in a thousand recordings. The sinusoid was fitted and subtracted, and the frequencies around it were left out of the fit; the estimates allow for what was taken out.
What to do: look for mains pickup, a fan, a stage controller.`},
	{CodeWithheld, "an estimate was withheld", `The recording does not determine this estimate: by the Fisher information no method could give it to better than 50 % (35 % where the noise is not stated), or its likelihood has no maximum. The adopted stiffness does not rest on it.
What to do: record longer or faster, shorten the exposure, or state the localisation noise.`},
	{CodeOneSided, "the stiffness has a lower limit only", `The interval of the adopted stiffness holds all values above its lower end: a trap as stiff as one likes would explain the recording as well, because its samples are (nearly) independent of each other and an unstated noise could make up any part of their variance. The lower end covers like that of any other interval.
What to do: state the localisation noise, measured with a stuck bead under the same illumination; sample faster; record longer.`},
	{CodeNoiseUnknown, "noise cannot be told from motion", `When the bead relaxes within about three samples, white localisation noise, blur and relaxation all make the same change to the spectrum. Without knowledge of the noise, corner frequency and variance cannot be told apart, and only the computed drag keeps the stiffness determined.
What to do: measure the noise with a stuck bead under the same illumination and state it, or sample faster.`},
	{CodeHydrodynamics, "the inertia of the liquid matters", `The drag of a sphere grows with frequency as 1 + sqrt(f/f_nu), f_nu = nu/(pi R^2) (1.1 MHz for a bead of 1 um in water). A fit with constant drag over a wide band is low in corner frequency and diffusion coefficient together: by 3.5 % up to 5 kHz and 8.5 % up to 20 kHz for a bead of 1 um with a corner of 500 Hz.
What to do: let the fit use frequency-dependent drag (the setting fit.drag), or restrict the band to a few times the corner frequency.`},
	{CodeGoodPart, "only the good part was used", `A check found something bad that has a place in the recording, such as an escape at 40 s. With --use good the recording is cut to the longest part that nothing bad has a claim on, the part is checked again, and what remains is calibrated as if it were the whole recording. At least a tenth of the recording must remain.
What to do: look at the trace figure, where what was left out is hatched. A shorter recording has a larger statistical uncertainty, which the result has.`},
	{CodeParts, "the recording was analysed in parts", `The samples, twice, would take more memory than --max-memory allows. The recording was cut into consecutive parts of equal length. Mean and straight line are taken off each part by itself; periodograms, mean squares and mean-square displacements are averaged over the parts, and estimates and uncertainties are those of so many independent records. What is slower than a part is lost, and so is what is left over behind the last one; the finding names the share of the information on the stiffness that this costs. A part with more than 0.2 % of its samples missing is given up, gaps in others are bridged by straight lines. Narrow lines are taken out of the mean spectrum.
What to do: nothing, when the share is small. With a larger --max-memory the parts are longer, and a recording that fits is analysed as a whole.`},
	{CodeShortParts, "the parts are short against the motion", `A recording that is analysed in parts is a set of short records. With fewer than a hundred periods of the corner frequency in each, much of the slow motion is lost with the mean and the line of each part; the estimates stay unbiased and their uncertainties say what is left.
What to do: raise --max-memory, or record slower.`},
	{CodeNothingCut, "nothing was cut", `--use good was given, but no bad check has a place that could be left out. All of the recording was calibrated. What is bad everywhere, such as clipping, cannot be cut.
What to do: nothing.`},
	{CodeSelfScaled, "the sensitivity comes from the drag", `A detector speaks volts. Without a stated sensitivity the program takes the length scale at which the bead's diffusion coefficient is kT over its computed drag (Stokes and the wall). The stiffness is then 2 pi times drag times corner frequency; a stiffness through amplitude would be the same number again, so it is withheld, and there is no cross-check.
What to do: record with a stage that moves by a known amplitude, or measure the sensitivity with a stuck bead, and state it.`},
	{CodeDiode, "the photodiode is not determined", `A silicon photodiode in the near infrared passes a part of the signal through a low-pass of several kilohertz. With detector.f3db = "fit" its parameters are fitted together with the spectrum, and what they cost in certainty is in the interval of the stiffness. A recording shows them only when it is long enough and its rate is above f3dB: a low-pass that lies beyond the end of the search (1 kHz, and the sampling rate), or that leaves no mark above the noise, is not determined. The fit allows for it all the same.
What to do: find alpha and f3dB from a long recording at a high rate with the same detector, wavelength and bias, and state them.`},
	{CodeDiodeRoles, "trap or photodiode", `The spectrum of a trap seen through a photodiode is a product of two low-passes. If alpha and f3dB are both fitted, the two can change roles without a change of the spectrum. The computed drag usually tells them apart, for it says what amplitude belongs to a corner frequency. Where it cannot, because no sensitivity is stated or the corners are close, the trap is taken to be the slower one.
What to do: state alpha and f3dB, found with the same detector and a larger bead, whose corner frequency is lower.`},
	{CodeLost, "the bead was lost in the flow", `In a driven recording the position goes beyond 9 times the rms of the beginning, and beyond half of the amplitude of the stage, and does not come back: the liquid carries the bead along. The part before is calibrated. The largest force in it is the stiffness times the largest systematic displacement, with thermal motion left out; where the stage moves at constant speed, Stokes drag gives it too, and the drag at the moment of the loss. The stiffness is that at the centre; where a trap is softer further out, the drag is the better figure. An escape is a matter of chance as much as of force: the force depends on how fast it grows and for how long it lasts.
What to do: repeat, and look at the distribution of the forces.`},
	{CodeFreeDrag, "the drag of a free bead is not the computed one", `With the laser off the diffusion coefficient of the bead gives its drag, kT/D, with no trap in between. When it differs from Stokes times wall factor by more than the stated uncertainties allow (family-wise p below 0.005), bead diameter, viscosity, temperature, height or length scale is wrong; the diffusion coefficient goes with the square of the length scale. A bead that sinks while it is free comes closer to the surface, where the drag is higher.
What to do: check these inputs; record the free bead in short pieces and catch it in between.`},
	{CodeFreeUnused, "a recording of the free bead was not used", `The track list gives a recording of the same bead the role free, or the setting free_bead names one, and its drag would stand beside the computed one. It could not be read, has no such axis, or does not give the diffusion coefficient. The stiffness rests on the computed drag alone.
What to do: calibrate that recording on its own to see what it lacks, or state free_bead = "none".`},
	{CodeBackgroundDrift, "the background is not white", `A recording without a bead, or with a stuck one, shows the noise of the detection. The fits take it as white. Drift of the stage, air currents and pointing of the laser add variance at low frequency, which is counted as an uncertainty of the noise.
What to do: look for drift and vibration; enclose the beam path; record the background for as long as the bead.` + caution},
	{CodeTilted, "the recorded axes are not those of the trap", `Two recorded axes move together, so that the stiffness along them is not that along the axes of the trap. Either the trap is an ellipse that lies askew, as with tilted polarisation, or the detector mixes the axes. A bead diffuses alike in all directions, so a tilt does not show far above the corner frequencies, and cross-talk does.
What to do: turn the recorded axes to those of the trap, whose directions and stiffness the result holds; or align the detector.` + caution},
}
