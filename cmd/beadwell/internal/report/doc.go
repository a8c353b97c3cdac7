// Package report turns a calib.Result into what people and programs read:
// text, JSON, CSV and HTML.
//
// A printer scales, rounds and arranges; it decides nothing and computes no
// statistic. Everything printed comes from the Result, so each output can be
// remade from the stored JSON alone.
package report
