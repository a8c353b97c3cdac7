package health

import (
	"fmt"
	"math"
)

const (
	missingDoubtful = 5e-4 // share of samples; the fit steps over gaps, so that few are harmless
	missingBad      = 0.2
	jitterDoubtful  = 0.1  // rms over the sampling interval; stamps rounded to a third of the interval have 0.1
	jitterBad       = 0.35 // stamps rounded to a whole interval have 0.29; beyond, samples change places
	repeatsDoubtful = 1e-3 // share of samples
	repeatsBad      = 0.05
)

// clock makes the checks of the recording as a whole.
func (in Input) clock() []Check {
	all := 0
	if len(in.Axes) > 0 {
		all = in.Axes[0].sampleCount()
	}
	return []Check{in.dropped(all), in.jitter(), in.repeated(all)}
}

func (in Input) dropped(all int) Check {
	c := start("dropped-samples")
	c.Threshold = missingDoubtful
	missing := in.Missing
	for _, a := range in.Axes {
		missing = max(missing, a.missingCount())
	}
	if all == 0 {
		return c.spared("there are no samples")
	}
	c.Value = float64(missing) / float64(all)
	switch {
	case c.Value > missingBad:
		c.Level = Bad
	case c.Value > missingDoubtful && missing > 1:
		c.Level = Doubtful
	}
	if missing == 0 {
		c.Text = "No sample is missing."
		return c
	}
	c.Text = fmt.Sprintf("%d of %d samples are missing, %s.", missing, all, percent(c.Value))
	if c.Level != OK {
		c.Remedy = "Record slower, with a smaller field, or to a faster disk; the fit steps over gaps, but loses what was in them."
	}
	return c
}

func (in Input) jitter() Check {
	c := start("uneven-clock")
	c.Threshold = jitterDoubtful
	if !(in.JitterRMS >= 0) || !(in.Rate > 0) {
		return c.spared("there are no time stamps")
	}
	c.Value = in.JitterRMS * in.Rate
	c.Text = fmt.Sprintf("The time stamps scatter by %s of the sampling interval about even sampling.", percent(c.Value))
	switch {
	case c.Value > jitterBad:
		c.Level = Bad
	case c.Value > jitterDoubtful:
		c.Level = Doubtful
	}
	if c.Level != OK {
		c.Remedy = "Trigger the camera or the digitiser by a clock instead of software. If only the stamps are coarse and the sampling is even, state the rate."
	}
	return c
}

func (in Input) repeated(all int) Check {
	c := start("repeated-stamps")
	c.Threshold = repeatsDoubtful
	if all == 0 {
		return c.spared("there are no samples")
	}
	c.Value = float64(in.Duplicates) / float64(all+in.Duplicates)
	switch {
	case in.Duplicates == 0:
		c.Text = "No sample came twice."
		return c
	case c.Value > repeatsBad:
		c.Level = Bad
	case c.Value > repeatsDoubtful:
		c.Level = Doubtful
	}
	c.Text = fmt.Sprintf("A sample came again with the same time stamp %s, %s of all; the repeats were left out.", times(in.Duplicates), percent(c.Value))
	if c.Level != OK {
		c.Remedy = "Find out why the recording program writes samples twice; make sure that none was lost in exchange."
	}
	return c
}

// known tells whether a number is neither NaN nor infinite.
func known(v float64) bool { return !math.IsNaN(v) && !math.IsInf(v, 0) }
