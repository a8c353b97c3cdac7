package calib

import (
	"fmt"
	"math"
	"slices"

	"beadwell/calib/quantity"
	"beadwell/calib/session"
	"beadwell/calib/track"
	"beadwell/psd"
)

// Waveforms of a driven stage.
const (
	sineWave     = "sine"
	triangleWave = "triangle"
)

// drive is the motion of the stage, as it was stated and as its own track shows it.
type drive struct {
	rate      float64 // of the recording [Hz]
	axis      string  // that follows the stage
	waveform  string
	frequency float64       // Hz
	refined   bool          // frequency was found from the record, near the stated one
	stated    float64       // amplitude [m]; NaN when it is not
	statedU   float64       // its relative standard uncertainty
	column    []float64     // the stage's own track [m]; nil without one
	tracked   *psd.Sinusoid // of the column
	trackedU  float64       // relative standard uncertainty of its amplitude, of the record
}

// newDrive reads what is known of the motion of the stage.
func newDrive(rec *track.Recording, set *session.Settings) (*drive, error) {
	d := &drive{rate: rec.Rate, waveform: sineWave, frequency: math.NaN(), stated: math.NaN()}
	if s, ok := set.Lookup("drive.waveform", ""); ok && s.Word != "" {
		d.waveform = s.Word
	}
	if s, ok := number(set, "drive.frequency", ""); ok {
		d.frequency = s.Value.SI
	}
	if s, ok := number(set, "drive.amplitude", ""); ok {
		d.stated, d.statedU = s.Value.SI, s.Value.U/s.Value.SI
	}
	if err := d.readColumn(rec); err != nil {
		return nil, err
	}
	if d.column == nil && math.IsNaN(d.frequency) {
		return nil, &SettingError{Key: "drive.frequency", Problem: "is not given, and the recording has no column of the stage",
			Remedy: `give it with --drive-frequency "28 Hz", or name the column with --columns stage=NAME`}
	}
	if d.column == nil && math.IsNaN(d.stated) {
		return nil, &SettingError{Key: "drive.amplitude", Problem: "is not given, and the recording has no column of the stage in a unit of length",
			Remedy: `give it with --drive-amplitude "150(2) nm", or name the column with --columns stage=NAME`}
	}
	if d.frequency > rec.Rate/2 {
		return nil, &SettingError{Key: "drive.frequency", Problem: fmt.Sprintf("of %g Hz is above half the sampling rate of %g Hz", d.frequency, rec.Rate),
			Remedy: "check both"}
	}
	if d.column != nil && d.waveform == sineWave {
		return d, d.follow(rec)
	}
	return d, nil
}

// readColumn takes the track of the stage from the column that was kept for it.
func (d *drive) readColumn(rec *track.Recording) error {
	if len(rec.Extra) == 0 {
		return nil
	}
	c := rec.Extra[0]
	unit := ""
	for _, u := range rec.ReadAs.Columns {
		if u.Header == c.Header && u.Role == "kept" {
			unit = u.Unit
		}
	}
	perMetre, err := quantity.Convert(1, unit)
	if unit == "" && !math.IsNaN(d.stated) { // shape and phase from the column, size from the setting
		perMetre, err = spread(c.Values)/d.stated, nil
	}
	if err != nil || !slices.Contains([]string{"", "m", "mm", "um", "nm", "pm"}, unit) || !(perMetre > 0) {
		return &DataError{Name: rec.Name, Problem: fmt.Sprintf("the column %q of the stage has no unit of length (%q)", c.Header, unit),
			Remedy: "write its unit into the header, such as stage (um), or state the motion with --drive-amplitude and --drive-frequency alone"}
	}
	d.column = make([]float64, len(c.Values))
	for i, v := range c.Values {
		d.column[i] = v / perMetre
	}
	return nil
}

// spread is half of the distance from the least to the largest value.
func spread(values []float64) float64 {
	low, high := math.Inf(1), math.Inf(-1)
	for _, v := range values {
		if v < low {
			low = v
		}
		if v > high {
			high = v
		}
	}
	return (high - low) / 2
}

// follow fits a sinusoid to the track of the stage.
func (d *drive) follow(rec *track.Recording) error {
	r, err := psd.Prepare(d.column, rec.Rate)
	if err != nil {
		return &DataError{Name: rec.Name, Problem: "the column of the stage: " + err.Error(), Remedy: "check the column"}
	}
	if math.IsNaN(d.frequency) {
		d.frequency = r.Tallest()
	}
	d.frequency = r.NearFrequency(d.frequency)
	s, err := r.TakeSinusoid(d.frequency)
	if err != nil {
		return &DataError{Name: rec.Name, Problem: "the column of the stage: " + err.Error(), Remedy: "record several periods of the drive"}
	}
	d.tracked, d.trackedU = &s, math.Sqrt(s.Scatter*r.MeanSquare())/s.Amplitude
	return nil
}

// leastShift is the error of a stated frequency, in periods over the whole record, from which on it is
// corrected by the record: one of a twentieth lowers the line by 0.4 %.
const leastShift = 0.05

// refine corrects the stated frequency by the record of the bead where it matters.
func (d *drive) refine(r *psd.Record) {
	d.refined = true
	if found := r.NearFrequency(d.frequency); math.Abs(found-d.frequency)*r.Duration() > leastShift {
		d.frequency = found
	}
}

// amplitude returns the amplitude of the stage before the exposure blurs it [m], the relative standard uncertainty that
// its record gives it, and the one that was stated.
func (d *drive) amplitude(blur float64) (value, record, stated float64) {
	if d.tracked != nil {
		return d.tracked.Amplitude / blur, d.trackedU, d.statedU
	}
	return d.stated, 0, d.statedU
}

// blurOf is the share of the amplitude of a sinusoid that an exposure [s] leaves.
func blurOf(hz, exposure float64) float64 {
	a := math.Pi * hz * exposure
	if a == 0 {
		return 1
	}
	return math.Sin(a) / a
}

// drivenAxis returns the axis that follows the stage most clearly.
func drivenAxis(rec *track.Recording, d *drive) (int, error) {
	best, at := 0.0, -1
	var names []string
	for i, a := range rec.Axes {
		names = append(names, a.Name)
		ratio := 0.0
		if d.waveform == triangleWave && d.column != nil {
			ratio = strokeRatio(a.Values, d.column)
		} else if r, err := psd.Prepare(a.Values, rec.Rate); err == nil {
			ratio = lineRatio(r, d.frequency)
		}
		if ratio > best {
			best, at = ratio, i
		}
	}
	if best < leastDrive {
		return 0, &DataError{Name: rec.Name, Problem: fmt.Sprintf("the bead does not follow the stage along %s", join(names)),
			Remedy: "check the frequency of the drive, or drive by a larger amplitude"}
	}
	return at, nil
}

// lineRatio is the power of the line at a frequency [Hz] over that of the frequencies around it, 1 by chance.
func lineRatio(r *psd.Record, hz float64) float64 {
	s, err := r.TakeSinusoid(hz)
	if err != nil {
		return 0
	}
	k, reach := hz*float64(r.Length)/r.Rate, max(8, r.Length/1000)
	sum, n := 0.0, 0
	for j := max(1, int(k)-reach); j < min(len(r.Power)-1, int(k)+reach); j++ {
		if math.Abs(float64(j)-k) > 2.5 {
			sum += r.Power[j]
			n++
		}
	}
	if n == 0 {
		return 0
	}
	return s.Amplitude * s.Amplitude / (2 * s.Scatter * sum / float64(n) / float64(r.Length))
}

// strokeRatio is the squared mean of what the later halves of the strokes deviate in the direction of the stage's
// motion, over its variance, from the scatter of the strokes; 1 by chance.
func strokeRatio(x, stage []float64) float64 {
	var sum, square, n float64
	all := strokes(stage)
	for i := 0; i+1 < len(all); i++ { // each with the next, so that mean and drift drop out
		here, _ := meanOf(x[(all[i].begin+all[i].end)/2 : all[i].end])
		next, _ := meanOf(x[(all[i+1].begin+all[i+1].end)/2 : all[i+1].end])
		v := here - next
		if i%2 == 1 {
			v = -v
		}
		if v == v {
			sum += v
			square += v * v
			n++
		}
	}
	if n < leastStrokes-1 {
		return 0
	}
	return sum * sum / n / ((square - sum*sum/n) / (n - 1))
}

// leastDrive is the least ratio of a line's power to what chance makes of it. Chance exceeds it with
// a probability of exp(-12), 6e-6; the amplitude is then known to about 20 %.
const leastDrive = 12

// reversalRate is the fundamental frequency of a stage whose track alone is known: two reversals a period [Hz].
func (d *drive) reversalRate(rate float64) float64 {
	legs := strokes(d.column)
	if len(legs) < 3 {
		return math.NaN()
	}
	inner := legs[1 : len(legs)-1]
	return float64(len(inner)) * rate / (2 * float64(inner[len(inner)-1].end-inner[0].begin))
}
