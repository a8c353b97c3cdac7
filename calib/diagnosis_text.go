package calib

import (
	"fmt"
	"math"
	"strings"

	"beadwell/calib/quantity"
)

// trimmedCaution is the caution as a text of its own.
var trimmedCaution = strings.TrimSpace(caution)

// measurements say what confirms or excludes a cause.
var measurements = map[string]string{
	CauseScale:       "image a stage micrometre, or move a stuck bead by a known step of the stage, along each axis",
	CauseScaleOne:    "move a stuck bead by the same known step along every axis",
	CauseTemperature: "measure the temperature in the chamber with the laser on, or repeat the recording at half the laser power: heating by the laser changes, a wrong room temperature does not",
	CauseViscosity:   "measure the viscosity of the liquid from this very chamber, or repeat in pure water",
	CauseDiameter:    "repeat with other beads of the batch: a scatter of the ratio from bead to bead is one of diameters; or measure the batch in an electron microscope",
	CauseHeight:      "repeat at least ten radii above the surface, where the height no longer matters",
	CauseExposure:    "read the exposure from the camera's own settings, or repeat at half the exposure: the blur changes, nothing else does",
	CauseNoise:       "record a bead that is stuck to the surface under the same light",
	CauseDrift:       "let the stage settle and record again, or restrict the fit with --band to frequencies above the drift",
	CauseInertia:     "repeat the fit with --drag frequency-dependent, or with --band up to a few times the corner frequency",
	CauseStage:       "measure the stroke of the stage at this frequency, by a bead that is stuck to the surface",
	CauseHeating:     "repeat the recording at half the laser power: a rise of the temperature by the laser halves too",
	CauseRate:        "film a clock or a blinking light of known frequency, and count the frames",
}

// cautious are the causes whose measurement touches the laser.
var cautious = map[string]bool{CauseTemperature: true, CauseHeating: true}

// shown prints a quantity in a unit for reading.
func shown(q Quantity) string {
	u := 0.0
	if q.Combined != nil {
		u = float64(q.Combined.Standard)
	}
	unit := q.Unit
	switch unit {
	case "m":
		unit = "nm"
		if math.Abs(float64(q.Value)) >= 1e-6 {
			unit = "um"
		}
	case "K":
		unit = "C"
	case "Pa s":
		unit = "mPa s"
	case "m/V":
		unit = "um/V"
	case "s":
		unit = "ms"
	case "1":
		return strings.TrimSpace(quantity.Format(float64(q.Value), u, "1"))
	}
	if _, err := quantity.Convert(0, unit); err != nil {
		return fmt.Sprintf("%.4g %s", float64(q.Value), unit)
	}
	return quantity.Format(float64(q.Value), u, unit)
}

// away says how far the needed value is from the stated one.
func away(c Cause) string {
	if !c.Change.Known() {
		return ", for which no uncertainty was stated"
	}
	return fmt.Sprintf(", %.1f of its stated standard uncertainties away", math.Abs(float64(c.Change)))
}

func textOfFactor(c Cause) string {
	r := float64(c.Ratio)
	relation, size := "larger", r-1
	if r < 1 {
		relation, size = "smaller", 1-r
	}
	percent := fmt.Sprintf("%.1f %%", 100*size)
	if r > 2 || r < 0.5 {
		percent = fmt.Sprintf("a factor of %.3g", math.Exp(math.Abs(math.Log(r))))
	}
	text := fmt.Sprintf("%s %s %s than stated", c.Name, percent, relation)
	if c.Stated.Unit != "1" {
		text += fmt.Sprintf(" (%s in place of %s)", shown(c.Needed), shown(c.Stated))
	} else if u := c.Needed.Combined; u != nil {
		text = fmt.Sprintf("%s %s %% %s than the file states", c.Name, strings.TrimSpace(quantity.Format(100*size, 100*float64(u.Standard), "1")), relation)
	}
	return text + away(c)
}

func textOfTemperature(c Cause) string {
	d := float64(c.Needed.Value - c.Stated.Value)
	relation := "above"
	if d < 0 {
		relation = "below"
	}
	return fmt.Sprintf("%s %.1f K %s the stated one (%s in place of %s)%s", c.Name, math.Abs(d), relation, shown(c.Needed), shown(c.Stated), away(c))
}

func textOfHeight(c Cause) string {
	if !c.Stated.Known() {
		return fmt.Sprintf("surface at %s from the bead's centre, where none was stated to be near", shown(c.Needed))
	}
	if c.Name != heightName {
		return fmt.Sprintf("%s (%s in place of %s here)%s", c.Name, shown(c.Needed), shown(c.Stated), away(c))
	}
	return fmt.Sprintf("%s of %s in place of %s%s", c.Name, shown(c.Needed), shown(c.Stated), away(c))
}

func textOfExposure(c Cause) string {
	return fmt.Sprintf("%s of %s in place of %s%s", c.Name, shown(c.Needed), shown(c.Stated), away(c))
}

func textOfNoise(c Cause) string { return textOfExposure(c) }

func textOfRate(c Cause) string {
	return fmt.Sprintf("%s of %.6g Hz in place of %.6g Hz (a factor of %g)", c.Name, float64(c.Needed.Value), float64(c.Stated.Value), float64(c.Ratio))
}

func textOfInertia(Cause) string {
	return "drag that grows with frequency, in place of the constant drag that was fitted"
}

func textOfDrift(c Cause) string {
	return fmt.Sprintf("%s of %s rms under the motion of the bead", c.Name, shown(c.Needed))
}

// diagnosisText is the diagnosis in a few sentences.
func diagnosisText(causes []Cause) string {
	var tied []string
	most := 0.0
	for _, c := range causes {
		if c.Tied {
			tied = append(tied, article(c.Text))
			most = math.Max(most, float64(c.PValue))
		}
	}
	switch {
	case len(tied) == 0:
		return "No single cause could be tried."
	case most < familyLevel:
		return fmt.Sprintf("No single cause explains the disagreement; what comes nearest is: %s. Look for two causes at once, or for a fault of the recording itself.", tied[0])
	case len(tied) == 1:
		return fmt.Sprintf("One cause alone would reconcile the routes: %s.", tied[0])
	}
	return fmt.Sprintf("Any one of these would reconcile the routes, and this recording cannot tell them apart: %s. The one listed first needs the smallest change from what was stated.", strings.Join(tied, "; or "))
}

// weighedWith names the recordings that joined the diagnosis, and says why others could not.
func weighedWith(names, unused []string) string {
	text := ""
	if len(names) > 0 {
		text = " Weighed together with " + join(names) + "."
	}
	for _, reason := range unused {
		text += " Could not be weighed: " + reason + "."
	}
	return text
}

// article sets "a" or "an" before a name.
func article(name string) string {
	if strings.ContainsRune("aeiou", rune(name[0])) {
		return "an " + name
	}
	return "a " + name
}
