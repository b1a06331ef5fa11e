//go:build race

package window

// raceDetector tells that the race detector is on, under which everything takes several times as long.
const raceDetector = true
