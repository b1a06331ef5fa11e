//go:build !race

package window

// raceDetector tells that the race detector is off.
const raceDetector = false
