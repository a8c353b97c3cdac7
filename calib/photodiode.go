package calib

import (
	"fmt"
	"math"

	"beadwell/calib/relaxation"
	"beadwell/psd"
)

// Photodiode is the low-pass of the detector of one axis. A silicon photodiode passes the share alpha of the signal at
// once and the rest through a low-pass at f3dB (Berg-Sorensen et al., J. Appl. Phys. 93 (2003) 3167), so that the power
// at f is multiplied by alpha^2 + (1 - alpha^2)/(1 + (f/f3dB)^2) (docs/method.md, Eq. 61).
type Photodiode struct {
	Alpha       Quantity `json:"alpha"`           // 1; from the power it passes where it was fitted, so that its interval is lopsided
	AlphaOrigin string   `json:"alpha_origin"`    // "stated", "fitted", "not stated": 0 then
	F3dB        Quantity `json:"f3db"`            // Hz
	F3dBOrigin  string   `json:"f3db_origin"`     // "stated", "fitted"
	WithAlpha   Float    `json:"alpha_with_fc"`   // correlation of a fitted alpha squared with the corner frequency; null when it was not fitted
	WithF3dB    Float    `json:"f3db_with_fc"`    // correlation of a fitted f3dB with the corner frequency; null when it was not fitted
	Kept        Float    `json:"variance_passed"` // share of the variance of the position that detector and exposure pass
}

// Origins of a value of the photodiode.
const (
	diodeStated = "stated"
	diodeFitted = "fitted"
	diodeUnset  = "not stated"
)

// Codes of the findings on a fitted photodiode.
const (
	CodeDiode      = "photodiode-not-determined"
	CodeDiodeRoles = "photodiode-or-trap"
)

// fitWord asks for a parameter of the photodiode to be fitted.
const fitWord = "fit"

// photodiode is what is set of the detector's low-pass; false without one. Where f3dB is fitted and nothing is said of
// alpha, that is fitted too, and the reverse.
func (w *work) photodiode() (h psd.Hydrodynamic, ok bool) {
	f3db, hasF3dB := w.set.Lookup("detector.f3db", "")
	alpha, hasAlpha := w.set.Lookup("detector.alpha", "")
	h.FitF3dB = f3db.Word == fitWord || !hasF3dB && alpha.Word == fitWord
	if !hasF3dB && !h.FitF3dB {
		return h, false
	}
	h.FitAlpha = alpha.Word == fitWord || !hasAlpha && h.FitF3dB
	if !h.FitF3dB {
		h.F3dB = math.Max(f3db.Value.SI+w.moved[f3dbMoves]*f3db.Value.U, f3db.Value.SI/10)
	}
	if !h.FitAlpha && hasAlpha {
		h.Alpha = math.Max(0, math.Min(1, alpha.Value.SI+w.moved[alphaMoves]*alpha.Value.U))
	}
	return h, true
}

// diodeU are the stated standard uncertainties of alpha and of f3dB [Hz], 0 for those that are fitted.
func (w *work) diodeU() (alpha, f3db float64) {
	if h, ok := w.photodiode(); ok {
		a, _ := number(w.set, "detector.alpha", "")
		f, _ := number(w.set, "detector.f3db", "")
		if !h.FitAlpha {
			alpha = a.Value.U
		}
		if !h.FitF3dB {
			f3db = f.Value.U
		}
	}
	return alpha, f3db
}

// clearly is the ratio of likelihoods, in its logarithm, from which on the record decides: 100.
const clearly = 4.605170185988092

// settleRoles tells trap and photodiode apart when both were fitted: two Lorentz curves in a row can change roles. The
// computed drag says what amplitude belongs to a corner frequency; where no length is known or it cannot
// decide, the trap is taken to be the slower of the two, and a finding says so.
func (w *work) settleRoles(record *psd.Record) {
	w.rival = nil
	other, ok := w.fit.Exchanged(record)
	if !ok {
		return
	}
	lead := w.withDrag(w.fit) - w.withDrag(other)
	undecided := math.Abs(lead) < clearly
	if undecided && other.Corner < w.fit.Corner || !undecided && lead < 0 {
		w.fit, other = other, w.fit
	}
	if undecided {
		w.rival = other
	}
}

// withDrag is the log-likelihood of a fit, less what its diffusion coefficient is off the computed one where lengths are
// known, normal in its logarithm.
func (w *work) withDrag(fit *psd.Fit) float64 {
	if w.unscaled || w.drive != nil {
		return fit.Maximum.Value
	}
	gg, ga, aa := w.phys.systematics()
	_, sd := fit.SD(alongDrag)
	off := math.Log(2*math.Pi*fit.Corner*fit.Variance) - math.Log(w.phys.kT/w.phys.gamma)
	return fit.Maximum.Value - off*off/(2*(sd*sd+gg+aa-2*ga))
}

// keptShare is the share of the variance that photodiode and exposure pass, and its derivative to ln fc.
func (w *work) keptShare(corner float64) (share, slope float64) {
	if w.form == nil {
		a := 2 * math.Pi * corner * w.exposure
		s, ds := relaxation.BlurVariance(a)
		return s, a * ds
	}
	return w.seen.Kept(corner, w.exposure)
}

// keptU is the relative uncertainty of the share that is passed, by the fitted photodiode.
func (w *work) keptU(corner float64) float64 {
	d, ok := w.fittedDiode()
	if !ok {
		return 0
	}
	kept, _ := w.keptShare(corner)
	u := 0.0
	add := func(alpha, f3dB float64) {
		h := w.seen
		h.Alpha, h.F3dB = alpha, f3dB
		if changed, _ := h.Kept(corner, w.exposure); changed > 0 {
			u = math.Hypot(u, math.Log(changed/kept))
		}
	}
	if d.ShareU > 0 {
		add(math.Sqrt(math.Min(1, d.Share+d.ShareU)), d.F3dB)
	}
	if d.F3dBU > 0 {
		add(d.Alpha, d.F3dB+d.F3dBU)
	}
	return u
}

func (w *work) fittedDiode() (psd.Diode, bool) {
	if w.form == nil || w.fit == nil || w.fitErr != nil {
		return psd.Diode{}, false
	}
	return w.fit.Diode()
}

// detected is what the photodiode adds to the mean-square displacement at a lag [samples], in m2; nil without one. With
// a constant drag the autocovariance behind the photodiode is a sum of two exponentials, of trap and photodiode
// (docs/method.md, Eq. 63).
func (w *work) detected(p relaxation.Process) func(lag int) float64 {
	h := w.seen
	if w.form == nil || h.F3dB == 0 {
		return nil
	}
	kept, _ := w.keptShare(p.Corner)
	plain, _ := relaxation.BlurVariance(2 * math.Pi * p.Corner * w.exposure)
	share, ratio := h.Alpha*h.Alpha, p.Corner/h.F3dB
	if math.Abs(ratio-1) < 1e-6 { // the limit is smooth, the formula is not
		ratio = 1 + 1e-6
	}
	slow := (1 - share) / (1 - ratio*ratio) // of the trap's exponential, beyond the prompt share
	fast := -ratio * slow
	return func(lag int) float64 {
		t := float64(lag) / w.rate
		trap, diode := math.Exp(-2*math.Pi*p.Corner*t), math.Exp(-2*math.Pi*h.F3dB*t)
		return 2 * p.Variance * ((kept - plain) - (share+slow-1)*trap - fast*diode)
	}
}

// describePhotodiode fills in the photodiode.
func (w *work) describePhotodiode() {
	h, ok := w.photodiode()
	if !ok {
		return
	}
	nan := Float(math.NaN())
	p := &Photodiode{AlphaOrigin: diodeStated, F3dBOrigin: diodeStated, WithAlpha: nan, WithF3dB: nan, Kept: nan}
	alphaU, f3dbU := w.diodeU()
	p.Alpha, p.F3dB = input(h.Alpha, alphaU, "1"), input(h.F3dB, f3dbU, "Hz")
	if _, stated := w.set.Lookup("detector.alpha", ""); !stated {
		p.AlphaOrigin = diodeUnset
	}
	w.axis.Photodiode = p
	if w.fitErr == nil {
		kept, _ := w.keptShare(w.fit.Corner)
		p.Kept = Float(kept)
	}
	d, fitted := w.fittedDiode()
	if h.FitAlpha {
		p.AlphaOrigin, p.Alpha = diodeFitted, Withheld("1", noDiode)
	}
	if h.FitF3dB {
		p.F3dBOrigin, p.F3dB = diodeFitted, Withheld("Hz", noDiode)
	}
	if fitted && h.FitAlpha {
		p.Alpha = alphaOf(d)
		if p.Alpha.Known() {
			p.WithAlpha = Float(d.WithCorner[0])
		}
	}
	if fitted && h.FitF3dB {
		p.F3dB = f3dBOf(d)
		if p.F3dB.Known() {
			p.WithF3dB = Float(d.WithCorner[1])
		}
	}
}

const (
	noDiode = "the spectrum does not give corner frequency, noise and photodiode apart"
	// looseDiode is the relative uncertainty of f3dB above which it is withheld: beyond, its interval means nothing.
	looseDiode = 0.5
	// promptSigma is the number of standard uncertainties that alpha squared must exceed for a value of alpha.
	promptSigma = 2
	z90         = 1.6448536269514722 // 95 % quantile of the standard normal
)

// alphaOf is the fitted alpha. Its square is near normal, and its interval is that of the square.
func alphaOf(d psd.Diode) Quantity {
	u := d.ShareU
	switch {
	case d.AtShare > 0:
		return Withheld("1", "the spectrum shows no low-pass: alpha is at the end of its range, 1")
	case d.AtShare < 0:
		return Withheld("1", "alpha is at the end of its range, 0: all of the signal passes the low-pass")
	case !(u > 0) || u > 1:
		return Withheld("1", noDiode)
	case d.Share < promptSigma*u:
		return Withheld("1", fmt.Sprintf("alpha squared, %.2g, is not above twice its uncertainty: alpha is below %.2g (95 %%)", d.Share, math.Sqrt(math.Min(1, d.Share+z90*u))))
	}
	root := func(share float64) Float { return Float(math.Sqrt(math.Max(0, math.Min(1, share)))) }
	interval := Uncertainty{Standard: Float(u / (2 * d.Alpha)), Interval68: [2]Float{root(d.Share - u), root(d.Share + u)},
		Interval95: [2]Float{root(d.Share - z95*u), root(d.Share + z95*u)}}
	combined := interval
	return Quantity{Value: Float(d.Alpha), Unit: "1", Statistical: &interval, Combined: &combined}
}

func f3dBOf(d psd.Diode) Quantity {
	u := d.F3dBU / d.F3dB
	switch {
	case d.AtShare > 0:
		return Withheld("Hz", "the spectrum shows no low-pass")
	case d.AtF3dB > 0:
		return Withheld("Hz", fmt.Sprintf("the low-pass lies above %.4g kHz, where the search ends", d.F3dB/1e3))
	case d.AtF3dB < 0:
		return Withheld("Hz", fmt.Sprintf("the low-pass lies at or below %.4g kHz, where the search begins: it cannot be told from the trap", d.F3dB/1e3))
	case !(u > 0) || u > looseDiode:
		return Withheld("Hz", noDiode)
	}
	o := relaxation.Normal(u)
	return exponential(math.Log(d.F3dB), u, o, u, o, "Hz")
}

// diodeFindings tells when a photodiode that was to be fitted is not determined, or might be the trap.
func (w *work) diodeFindings() []Finding {
	h, ok := w.photodiode()
	p := w.axis.Photodiode
	if !ok || p == nil || !h.FitAlpha && !h.FitF3dB {
		return nil
	}
	nan := Float(math.NaN())
	var list []Finding
	const remedy = `state it with --f3db "8 kHz" --alpha 0.25, from another recording with the same detector; or record longer, at a rate of more than four times f3dB`
	switch {
	case h.FitF3dB && !p.F3dB.Known():
		list = append(list, Finding{Code: CodeDiode, Severity: Doubtful, Axis: w.axisName, Value: nan, Limit: nan,
			Text: "The photodiode was to be fitted, and this recording does not determine f3dB: " + p.F3dB.Reason + ".", Remedy: remedy})
	case h.FitAlpha && !p.Alpha.Known():
		list = append(list, Finding{Code: CodeDiode, Severity: Note, Axis: w.axisName, Value: nan, Limit: nan,
			Text: "The photodiode was fitted, and no value of alpha can be given: " + p.Alpha.Reason + "."})
	}
	if w.rival != nil && w.fitErr == nil {
		other, _ := w.rival.Diode()
		list = append(list, Finding{Code: CodeDiodeRoles, Severity: Doubtful, Axis: w.axisName, Value: Float(w.rival.Corner), Limit: nan, Unit: "Hz",
			Text: fmt.Sprintf("Two low-passes in a row do not say which of them is the trap. The slower one was taken: a corner frequency of %.4g Hz; with %.4g Hz, and the photodiode at %.4g Hz, the spectrum would be the same.",
				w.fit.Corner, w.rival.Corner, other.F3dB),
			Remedy: "state --f3db and --alpha, found with the same detector and a larger bead, whose corner frequency is lower"})
	}
	return list
}
