package batch

import (
	"bytes"
	"strings"
	"testing"

	"beadwell/calib"
)

// Recordings of one trap whose stage moves at constant speed make one line, in the JSON of the summary and in its notes.
func TestSummaryJoins(t *testing.T) {
	part := func(name string, slope calib.Float) calib.FlowPart {
		return calib.FlowPart{Name: name, Axis: "x", Trap: "one", Slope: slope, SlopeU: 3e-6, OffsetU: 1e-10, Drag: 8.9e-9, Strokes: 20, Chi: 17, Freedom: 17,
			Slowest: 5e-5, Fastest: 5e-5, Driven: 3e-5, DrivenU: 0.04, DrivenI: 0.01, InputsU: 0.02}
	}
	rows := []Row{emptyRow("a.csv", calib.Consistent, ""), emptyRow("b.csv", calib.Consistent, "")}
	rows[0].Flow, rows[1].Flow = []calib.FlowPart{part("a.csv", 2.98e-4)}, []calib.FlowPart{part("b.csv", 3.02e-4)}
	s := newSummary([]entry{{Rows: rows[:1]}, {Rows: rows[1:]}}, nil, SeriesOptions{})
	// 8.9e-9 N s/m over 3.00e-4 s; equal weights
	if len(s.Joined) != 1 || s.Joined[0].Slope.Value < 2.9999e-4 || s.Joined[0].Slope.Value > 3.0001e-4 {
		t.Fatalf("joined %+v", s.Joined)
	}
	stored, err := s.JSON()
	if err != nil || !bytes.Contains(stored, []byte(`"joined_flow"`)) {
		t.Errorf("%v: no line in the JSON", err)
	}
	if !strings.Contains(s.Text(), "stiffness 29.67(63) pN/um by constant flow") {
		t.Errorf("the text has no line:\n%s", s.Text())
	}
	if one := newSummary([]entry{{Rows: rows[:1]}}, nil, SeriesOptions{}); one.Joined != nil {
		t.Errorf("one recording is joined: %+v", one.Joined)
	}
}
