package filter

import (
	"slices"
	"testing"

	"labelweir/model"
	"labelweir/window"

	"pgregory.net/rapid"
)

// numbered is a snapshot and scorer whose score of a row is its number; it counts how it is called.
type numbered struct {
	means
	calls, rows int
}

func (n *numbered) NewScorer() Scorer { return n }

func (n *numbered) Score(t *model.Table, lo, hi int, dst []model.Score) error {
	n.calls++
	n.rows += hi - lo
	for i := lo; i < hi; i++ {
		dst[i-lo] = model.Score{P: float64(t.Keys[i])}
	}
	return nil
}

// judged has one worker judge rows lo to hi of n, of which the sampled ones have a score below zero from training.
func judged(first int64, n, lo, hi int, sampled []int64) ([]model.Score, *numbered) {
	s := &numbered{}
	fit := &trained{snapshot: s, view: &window.View{Rows: sampled}, scores: make([]model.Score, len(sampled))}
	for i, row := range sampled {
		fit.scores[i].P = -float64(row) - 1
	}
	t := &model.Table{Keys: make([]uint64, n)}
	for i := range t.Keys {
		t.Keys[i] = uint64(first) + uint64(i)
	}
	dst := make([]model.Score, hi-lo)
	var w judge
	if err := w.run(job{fit: fit, table: t, first: first, lo: lo, hi: hi, dst: dst}); err != nil {
		panic(err) // numbered has none
	}
	return dst, s
}

func TestEachRowHasTheScoreThatIsItsOwn(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		first := rapid.Int64Range(0, 50).Draw(t, "first")
		n := rapid.IntRange(1, 80).Draw(t, "rows")
		lo := rapid.IntRange(0, n-1).Draw(t, "lo")
		hi := rapid.IntRange(lo+1, n).Draw(t, "hi")
		sampled := rapid.SliceOfDistinct(rapid.Int64Range(0, 140), func(r int64) int64 { return r }).Draw(t, "sampled")
		slices.Sort(sampled)
		got, _ := judged(first, n, lo, hi, sampled)
		for i, s := range got {
			row := first + int64(lo+i)
			want := float64(row)
			if slices.Contains(sampled, row) {
				want = -want - 1
			}
			if s.P != want {
				t.Fatalf("row %d has %v, want %v", row, s.P, want)
			}
		}
	})
}

// A scorer walks many rows side by side, so few rows at a time cost more than a few rows in vain.
func TestSampledRowsDoNotCutWhatIsJudged(t *testing.T) {
	var every, most []int64
	for i := range int64(1000) {
		if i%5 == 0 {
			every = append(every, i)
		}
		if i != 300 && i != 301 {
			most = append(most, i)
		}
	}
	if _, s := judged(0, 1000, 0, 1000, every); s.calls != 1 {
		t.Errorf("every fifth row sampled: the scorer is asked %d times", s.calls)
	}
	if _, s := judged(0, 1000, 0, 1000, most); s.calls != 1 || s.rows != 2 {
		t.Errorf("all rows but two sampled: the scorer is asked %d times for %d rows", s.calls, s.rows)
	}
	if _, s := judged(0, 1000, 0, 1000, nil); s.calls != 1 || s.rows != 1000 {
		t.Errorf("no row sampled: the scorer is asked %d times for %d rows", s.calls, s.rows)
	}
}
