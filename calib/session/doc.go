// Package session holds the settings of a calibration: what they are called,
// what they may be, where each came from, and which one wins.
//
// One registry (Keys) describes every setting: its name in the session file, its flag,
// its dimension and limits, whether it may differ from axis to axis, and its
// meaning. The session file, the track list, the flags, the reference and the
// template are all read from it.
//
// A setting comes from one of five origins. The later in this list wins: the
// program's default, the header of the recording, the session file, the row of the track list, a
// flag. Every origin is kept, so that Contradictions can compare what the user
// stated with what the file says of itself.
//
// Values are in SI units with one standard uncertainty; see package quantity.
package session
