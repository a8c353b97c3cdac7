package calib

import (
	"beadwell/calib/health"
	"beadwell/calib/session"
	"beadwell/calib/track"
)

// checksOf makes the checks of a recording that no fit of a trap says anything of.
func checksOf(rec *track.Recording, set *session.Settings) []Check {
	in := unfittedInput(rec, set)
	run := health.Run
	switch roleOf(set) {
	case RoleFree:
		run = health.RunFree
	case RoleBackground:
		run = health.RunBackground
	}
	checks := []Check{}
	for _, c := range run(in) {
		checks = append(checks, newCheck(c, rec.Start))
	}
	return checks
}

// inspect makes the checks of a recording without a trap, and lets a bad one overrule the verdict.
func (r *Result) inspect(rec *track.Recording, set *session.Settings) {
	r.Checks = checksOf(rec, set)
	c, bad := r.worst()
	if bad {
		kept := r.Verdict.Reason
		r.judgeHealth()
		r.Verdict.Text = "The recording is not fit for use before the cause is found: " + c.Name + "."
		if kept == "" {
			r.Verdict.Reason = c.Text
		}
	}
	r.checkFindings()
}
