package cli

import (
	"runtime/debug"

	"beadwell/calib/track"
)

const (
	// copies is how many times the samples of a long recording are in memory at most: as they were read, and in
	// what the estimates make of them.
	copies = 2
	// slack is what a run needs besides [bytes]: the program, the buffers of the reader, tables of transforms.
	slack = 60 << 20
	// programSize is the memory of the process that is no heap [bytes]: mostly its code.
	programSize = 30 << 20
	// longSamples is the size of the samples [bytes] from which the collector is told to keep to this.
	longSamples = 64 << 20
)

// boundMemory lets the garbage collector run before the memory exceeds what recordings of this size need. By
// itself it lets the heap grow to twice of what is in use, which costs a long recording as much again and gains nothing.
// What the environment says (GOMEMLIMIT) goes before, if it is less.
func boundMemory(recordings []loaded) {
	size, room := 0, 0
	for _, one := range recordings {
		size += samplesSize(one.recording)
		room += roomOf(one.recording)
	}
	if size >= longSamples {
		limitHeap(int64(copies*size + room + slack))
	}
}

// limitHeap lowers the size of the heap [bytes] that the collector works against.
func limitHeap(size int64) {
	if size < debug.SetMemoryLimit(-1) {
		debug.SetMemoryLimit(size)
	}
}

// roomOf returns the memory behind the positions that the reader reserved and did not use [bytes]. It was never touched,
// but the collector counts it.
func roomOf(recording *track.Recording) int {
	room := 0
	for _, axis := range recording.Axes {
		room += 8 * (cap(axis.Values) - len(axis.Values))
	}
	return room
}

// samplesSize returns the memory that the positions of a recording take [bytes].
func samplesSize(recording *track.Recording) int { return 8 * recording.Samples * len(recording.Axes) }
