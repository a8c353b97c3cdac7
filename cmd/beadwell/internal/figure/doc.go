// Package figure draws the figures of a calibration from its stored result.
//
// A figure is made in two steps. The first turns a calib.Result into panels of
// series in SI units; it selects, decimates and describes, and never fits. The
// second paints the panels on a canvas of gonum/plot as SVG, PNG or PDF. What is
// painted is what Data writes as CSV, so a figure can be remade elsewhere.
//
// Width: one journal column, 85 mm. Colours: Okabe and Ito, "Color Universal
// Design", 2008; nothing is told by colour alone, shapes, dashes and labels
// repeat it. The same input gives the same bytes.
package figure
