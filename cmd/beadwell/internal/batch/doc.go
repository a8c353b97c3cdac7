// Package batch calibrates a folder of recordings: it finds them, runs them on
// several workers, keeps a journal from which an interrupted run goes on, and
// writes what they say together: a table, series and an index page.
//
// How one recording is read and calibrated is the caller's; this package sees its
// result only. Everything it writes depends on the recordings, their settings and
// their names alone: not on the number of workers, the clock, or an interruption.
package batch
