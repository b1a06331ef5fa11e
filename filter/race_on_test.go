//go:build race

package filter

// raceDetector tells that the race detector is on, which makes allocations of its own.
const raceDetector = true
