package filter

import (
	"testing"
)

// The real model behind the pipeline: planted wrong labels on well-separated grades are found, with the whole input as
// one window, with a sample of it, and with a window that slides (cold and warm fits), and what comes out does not depend
// on batches and workers. The truth is the one that was planted.
func TestRealModelFindsPlantedWrongLabels(t *testing.T) {
	if raceDetector {
		t.Skip("training under the race detector belongs to the tests of package model")
	}
	for name, change := range map[string]func(*Config){
		"whole":         func(c *Config) {},
		"whole sampled": func(c *Config) { c.Records = 700 },
		"sliding": func(c *Config) {
			c.Sliding, c.Records, c.Hold, c.Retrain = true, 700, 100, Every{Rows: 300}
		},
	} {
		t.Run(name, func(t *testing.T) {
			rows := 1500
			if name == "whole" {
				rows = 400
			}
			apples := pack(rows, 0.1, 0, 8)
			r := newRun(apples, change)
			r.sweep.Learner = nil
			want := r.do(t).outcome(t)
			wrong, found, alarms := 0, 0, 0
			for i, tag := range r.store.tags {
				flagged := tag.Verdict == Suspect || tag.Verdict == Quarantine
				switch isWrong := apples[i].observed != apples[i].truth; {
				case isWrong && flagged:
					wrong++
					found++
				case isWrong:
					wrong++
				case flagged:
					alarms++
				}
			}
			if found*10 < wrong*9 || alarms*50 > len(apples) {
				t.Errorf("%d of %d wrong labels found, %d false alarms", found, wrong, alarms)
			}
			if e := r.report.Noise.Share; e.Value < 0.05 || e.Value > 0.15 {
				t.Errorf("estimated share %+v, planted 0.1", e)
			}
			other := newRun(apples, change)
			other.sweep.Learner, other.sweep.Config.Workers = nil, 1
			crate := other.crate
			other.crate = func() *crateT { k := crate(); k.sizes = []int{1, 700, 13}; return k }
			if got := other.do(t).outcome(t); got != want {
				t.Errorf("other batches and workers show: %s", firstDifference(got, want))
			}
		})
	}
}
