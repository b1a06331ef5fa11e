package noise

import (
	"math"
	"math/rand/v2"
	"reflect"
	"testing"
)

// Scores that are the true log-odds: the planted rates must come out.
func TestPlantedFlipRatesAreFound(t *testing.T) {
	for name, p := range map[string]plant{
		"none":      {rows: 2500, spread: 4, flip: []float64{1, 0, 0, 1}, seed: 1},
		"one rate":  {rows: 2500, spread: 4, flip: []float64{0.85, 0.15, 0.15, 0.85}, seed: 2},
		"two rates": {rows: 2500, spread: 4, flip: []float64{0.95, 0.05, 0.3, 0.7}, seed: 3},
		"one pair":  {rows: 2500, spread: 4, flip: []float64{1, 0, 0, 0, 0.7, 0.3, 0, 0, 1}, seed: 4},
		"sources":   {rows: 2500, spread: 4, flip: []float64{0.9, 0.05, 0.05, 0.05, 0.9, 0.05, 0.05, 0.05, 0.9}, sources: []float64{0.2, 3}, seed: 5},
	} {
		t.Run(name, func(t *testing.T) {
			d, truth := p.draw()
			l, f := Fit(d)
			mean := 1.0
			if p.sources != nil {
				mean = (p.sources[0] + p.sources[1]) / 2
			}
			for i, want := range p.flip {
				if i%(d.Classes+1) != 0 && math.Abs(f.Flip[i].Value-mean*want) > 0.05 {
					t.Errorf("rate from %d to %d: %+v, planted %v", i/d.Classes, i%d.Classes, f.Flip[i], mean*want)
				}
			}
			share := wrongShare(d, truth)
			if math.Abs(f.Share.Value-share) > 0.03 || f.Share.Low > share || f.Share.High < share {
				t.Errorf("share of wrong labels %+v, planted %.3f", f.Share, share)
			}
			for s, factor := range p.sources {
				if want := 0.1 * factor; math.Abs(f.BySource[s].Value-want) > 0.06 {
					t.Errorf("source %d: %+v, planted %v", s, f.BySource[s], want)
				}
			}
			wantCalibrated(t, d, truth, judged(d, l))
		})
	}
}

// wantCalibrated compares scores with the truth in three bands.
func wantCalibrated(t *testing.T, d *Data, truth []int32, all []Judgement) {
	t.Helper()
	var n, expected, wrong [3]float64
	for i, j := range all {
		band := 0
		if j.Wrong > 0.1 {
			band = 1
		}
		if j.Wrong > 0.8 {
			band = 2
		}
		n[band]++
		expected[band] += j.Wrong
		if d.Observed[i] != truth[i] {
			wrong[band]++
		}
	}
	for b := range n {
		if sd := math.Sqrt(expected[b] + 4); math.Abs(expected[b]-wrong[b]) > 3*sd+0.03*n[b] {
			t.Errorf("band %d: %.1f of %v expected to be wrong, %v are", b, expected[b], n[b], wrong[b])
		}
	}
}

func TestFitDoesNotDependOnWorkers(t *testing.T) {
	d, _ := plant{rows: 300, spread: 3, flip: []float64{0.9, 0.1, 0.2, 0.8}, sources: []float64{0.5, 1.5}, seed: 6}.draw()
	l, f := Fit(d)
	d.Workers = 4
	if m, g := Fit(d); !reflect.DeepEqual(l, m) || !reflect.DeepEqual(f, g) {
		t.Error("four workers give another layer")
	}
}

func TestRefitGoesOnFromTheLastLayer(t *testing.T) {
	p := plant{rows: 1500, spread: 4, flip: []float64{0.9, 0.1, 0.1, 0.9}, seed: 7}
	d, _ := p.draw()
	l, _ := Fit(d)
	p.seed = 8
	next, truth := p.draw()
	m, f := Refit(next, l)
	if share := wrongShare(next, truth); math.Abs(f.Share.Value-share) > 0.03 {
		t.Errorf("share %+v, planted %.3f", f.Share, share)
	}
	wantCalibrated(t, next, truth, judged(next, m))
	if a, _ := Refit(next, nil); len(a.Models) == 0 {
		t.Error("nothing to go on from gives no layer")
	}
}

func TestMembersWithoutWeightCanBeDropped(t *testing.T) {
	d, _ := plant{rows: 400, spread: 3, flip: []float64{0.9, 0.1, 0.1, 0.9}, seed: 9}.draw()
	l, _ := Quick(d)
	idle := make([]float64, len(d.Members[0]))
	both := &Layer{Classes: 2, Steps: l.Steps}
	for _, m := range l.Models {
		m.P.A = []float64{0, m.P.A[0]}
		both.Models = append(both.Models, m)
	}
	with := *d
	with.Members = [][]float64{idle, d.Members[0]}
	if both.Weight(0) != 0 || both.Spread(&with, 0) != 0 || both.Weight(1) != l.Weight(0) {
		t.Errorf("weights %v and %v, was %v", both.Weight(0), both.Weight(1), l.Weight(0))
	}
	want := judged(&with, both)
	both.Keep([]int{1})
	if got := judged(d, both); !reflect.DeepEqual(got, want) {
		t.Error("dropping a member without weight changed judgements")
	}
}

func TestThresholdRisesWithThePrecision(t *testing.T) {
	d, truth := plant{rows: 3000, spread: 5, flip: []float64{0.85, 0.15, 0.15, 0.85}, seed: 10}.draw()
	l, _ := Quick(d)
	scores := make([]float64, d.Rows())
	for i, j := range judged(d, l) {
		scores[i] = j.Wrong
	}
	last := 0.0
	for _, precision := range []float64{0.55, 0.7, 0.8, 0.9, 0.95, 0.99, 0.999999} {
		at := Threshold(d, l, scores, precision, rand.New(rand.NewPCG(1, 1)))
		if at < last || at < 0.5 {
			t.Errorf("threshold %v at precision %v, %v at a lower one", at, precision, last)
		}
		last = at
		held, wrong := 0.0, 0.0
		for i, s := range scores {
			if s >= at {
				held++
				if d.Observed[i] != truth[i] {
					wrong++
				}
			}
		}
		if precision == 0.9 && held < 100 {
			t.Errorf("%v rows held back at precision %v", held, precision)
		}
		if held > 0 && wrong/held < precision {
			t.Errorf("%v of %v held back are wrong; wanted a share %v", wrong, held, precision)
		}
	}
	if last <= 1 {
		t.Errorf("nearly certain precision lets rows be held back from %v", last)
	}
}

func TestHopelessRowsAreNotHeldBack(t *testing.T) {
	d, _ := plant{rows: 400, spread: 0.1, flip: []float64{0.5, 0.5, 0.5, 0.5}, seed: 11}.draw()
	l, f := Fit(d)
	scores := make([]float64, d.Rows())
	for i, j := range judged(d, l) {
		scores[i] = j.Wrong
	}
	if at := Threshold(d, l, scores, 0.95, rand.New(rand.NewPCG(1, 1))); at <= 1 {
		t.Errorf("threshold %v; noise %+v", at, f.Share)
	}
}
