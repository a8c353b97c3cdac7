package report

import (
	"sync"

	"beadwell/calib"
	"beadwell/cmd/beadwell/internal/figure"
)

// Prepared is a result with the figures that several of its outputs share: each is drawn once, although it stands in the report and in a
// file of its own. It may be used by several goroutines.
type Prepared struct {
	Result  *calib.Result // must not change
	figures func() []figure.Figure
}

// Prepare makes nothing yet.
func Prepare(r *calib.Result) *Prepared {
	return &Prepared{Result: r, figures: sync.OnceValue(func() []figure.Figure { return figure.All(r) })}
}

// Figures are all figures of the result.
func (p *Prepared) Figures() []figure.Figure { return p.figures() }
