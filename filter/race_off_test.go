//go:build !race

package filter

// raceDetector tells that the race detector is off.
const raceDetector = false
