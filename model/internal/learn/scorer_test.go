package learn

import (
	"math"
	"slices"
	"testing"
)

func TestScoreSumsClippedDecisions(t *testing.T) {
	// Numbers x = (2, −1) and the constant; pairs (0,1), (0,2), (1,2).
	l := &Linear{Setting: Setting{Design: 0}, Pairs: []Pair{
		{A: 0, B: 1, W: []float64{1, 0, 0.5}},    // 2.5
		{A: 0, B: 2, W: []float64{5, 0, 0}},      // 10, clipped
		{A: 1, B: 2, W: []float64{0, 1.5, -0.5}}, // −2
	}}
	dst := make([]float64, 3)
	l.Score(&Input{Dense: []float32{2, -1, 1}}, dst)
	scale := PairScale(3, 3)
	for c, want := range []float64{scale * (2.5 + Clip), scale * (-2.5 - 2), scale * (-Clip + 2)} {
		if math.Abs(dst[c]-want) > 1e-12 {
			t.Errorf("class %d: %v, wanted %v", c, dst[c], want)
		}
	}
}

func TestLogSharesAreCentredAndFloored(t *testing.T) {
	v := []float64{1, 0, 0}
	logShares(v, 50)
	if d := v[0] - v[1]; math.Abs(d-math.Log(100)) > 1e-12 || math.Abs(v[0]+v[1]+v[2]) > 1e-12 {
		t.Errorf("%v", v)
	}
}

func TestPairsOfFewAndOfManyClasses(t *testing.T) {
	few := &Data{Classes: 5}
	ChoosePairs(few, nil)
	if len(few.Pairs) != 10 {
		t.Errorf("%d pairs of 5 classes", len(few.Pairs))
	}
	// Classes stand in a row; the nearer, the higher the score.
	const k = 26
	many := &Data{Classes: k}
	var scores []float64
	for c := range k {
		many.Labels = append(many.Labels, int32(c))
		for b := range k {
			scores = append(scores, -math.Abs(float64(b-c)))
		}
	}
	ChoosePairs(many, scores)
	count := make([]int, k)
	for _, p := range many.Pairs {
		if p[0] >= p[1] {
			t.Fatalf("pair %v", p)
		}
		count[p[0]]++
		count[p[1]]++
	}
	for c := range k - 1 {
		if !slices.Contains(many.Pairs, [2]int{c, c + 1}) {
			t.Errorf("neighbours %d and %d are not told apart", c, c+1)
		}
	}
	if slices.Min(count) < nearPairs || len(many.Pairs) >= k*(k-1)/2 {
		t.Errorf("%d pairs, a class in at least %d", len(many.Pairs), slices.Min(count))
	}
}

func TestTalliesAddUpByName(t *testing.T) {
	all := AddTally(nil, []Tally{{"warm", 2, 1, 0.5}})
	all = AddTally(all, []Tally{{"annealed", 1, 0, 0.25}, {"warm", 1, 1, 0}})
	if !slices.Equal(all, []Tally{{"warm", 3, 2, 0.5}, {"annealed", 1, 0, 0.25}}) {
		t.Errorf("%v", all)
	}
}
