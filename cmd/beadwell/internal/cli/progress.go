package cli

import (
	"time"

	"github.com/schollz/progressbar/v3"
)

// progress tells on standard error how far several recordings have come: a bar
// on a terminal, a line now and then elsewhere, nothing for one recording.
type progress struct {
	app       *app
	bar       *progressbar.ProgressBar // nil when there is none
	lines     bool
	done, all int
	begun     time.Time
	told      time.Time // when the last line was written
}

// tellEvery is the time between two lines: seldom enough for a log.
const tellEvery = 15 * time.Second

func (a *app) newProgress(all int, quiet bool) *progress {
	p := &progress{app: a, all: all, begun: a.Now(), told: a.Now()}
	switch {
	case quiet || all < 2:
	case a.Watched:
		p.bar = progressbar.NewOptions(all, progressbar.OptionSetWriter(a.Err), progressbar.OptionSetDescription("recordings"),
			progressbar.OptionShowCount(), progressbar.OptionClearOnFinish(), progressbar.OptionSetPredictTime(true))
	default:
		p.lines = !wantsJSON(a.args)
	}
	return p
}

// step counts one more recording.
func (p *progress) step() {
	p.done++
	if p.bar != nil {
		_ = p.bar.Add(1) // a bar that cannot be drawn is no reason to stop
	}
	if now := p.app.Now(); p.lines && p.done < p.all && now.Sub(p.told) >= tellEvery {
		left := time.Duration(float64(now.Sub(p.begun)) / float64(p.done) * float64(p.all-p.done))
		p.app.say("beadwell: %d of %d recordings done, about %s left", p.done, p.all, left.Round(time.Second))
		p.told = now
	}
}

// end takes the bar away.
func (p *progress) end() {
	if p.bar != nil {
		_ = p.bar.Clear()
	}
}
