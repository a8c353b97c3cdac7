package report

import (
	"io"
	"sync"

	"beadwell/calib"
	"beadwell/cmd/beadwell/internal/figure"
)

// Prepared is a result with what several of its outputs share, each part made once and when it is
// first asked for: the figures, which stand in the report and in files of their own, and the JSON, which is
// a file and the last element of the report. It may be used by several goroutines.
type Prepared struct {
	Result  *calib.Result // must not change
	figures func() []figure.Figure
	compact func() ([]byte, error)
}

// Prepare makes nothing yet.
func Prepare(r *calib.Result) *Prepared {
	return &Prepared{
		Result:  r,
		figures: sync.OnceValue(func() []figure.Figure { return figure.All(r) }),
		compact: sync.OnceValues(func() ([]byte, error) { return compactJSON(storable(r)) }),
	}
}

// Figures are all figures of the result.
func (p *Prepared) Figures() []figure.Figure { return p.figures() }

// JSON writes the result as the function JSON does.
func (p *Prepared) JSON(w io.Writer) error {
	compact, err := p.compact()
	if err != nil {
		return err
	}
	return writeIndented(w, compact)
}
