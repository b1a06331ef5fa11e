package filter

import (
	"context"
	"fmt"
	"io"
	"testing"

	"labelweir/model"
)

// witness is a Learner whose snapshots only say which of them judged a row, and whether as one of its own rows.
type witness struct {
	fits []map[uint64]bool // keys of the rows of each fit; nil for one that failed
	fail map[int]bool      // by number of the fit, from 0
}

const (
	asOwn   = 0.25 // score of a row by the fit that it was part of
	asFresh = 0.75 // score of a row by a snapshot that was fitted without it
)

func (w *witness) Fit(_ context.Context, t *model.Table) (*Fit, error) {
	k := len(w.fits)
	if w.fail[k] || t.Rows() == 0 {
		w.fits = append(w.fits, nil)
		return nil, fmt.Errorf("fit %d: %w", k, model.ErrOneClass)
	}
	keys := map[uint64]bool{}
	f := &Fit{Snapshot: testimony(k), Scores: make([]model.Score, t.Rows())}
	for i := range f.Scores {
		keys[t.Keys[i]] = true
		f.Scores[i] = model.Score{P: asOwn, Margin: 1}
	}
	w.fits = append(w.fits, keys)
	return f, nil
}

// testimony is a snapshot of witness: the number of its fit.
type testimony int

func (t testimony) ID() string { return fmt.Sprint("fit ", int(t)) }
func (t testimony) Facts() *model.Facts {
	return &model.Facts{Classes: grades(), Threshold: 2, Warm: t > 0}
}
func (t testimony) NewScorer() Scorer                  { return t }
func (t testimony) WriteTo(w io.Writer) (int64, error) { return 0, nil }
func (t testimony) Score(_ *model.Table, lo, hi int, dst []model.Score) error {
	for i := range hi - lo {
		dst[i] = model.Score{P: asFresh, Margin: 1}
	}
	return nil
}

// expected goes through the steps of a sliding sweep row by row, with a window of the latest rows, and gives the text
// of each row's tag.
func expected(apples []apple, c Config, keeps int, fail map[int]bool) []string {
	out := make([]string, len(apples))
	var kept []int // labelled rows in the window
	inFit := map[int]bool{}
	fits, newest, labelled, next, due, tried := 0, -1, 0, 0, -1, -1
	decide := func(upto int) {
		for ; next <= upto; next++ {
			switch {
			case apples[next].observed == "":
				out[next] = "no-label"
			case newest < 0:
				out[next] = "warming-up"
			case inFit[next]:
				out[next] = fmt.Sprint("fit ", newest, " own")
			default:
				out[next] = fmt.Sprint("fit ", newest, " fresh")
			}
		}
	}
	train := func() {
		if !fail[fits] && len(kept) > 0 {
			newest = fits
			inFit = map[int]bool{}
			for _, r := range kept {
				inFit[r] = true
			}
		}
		fits++
	}
	waiting := int(c.Bytes / 36)
	for n := range apples {
		if apples[n].observed != "" {
			labelled++
			if kept = append(kept, n); len(kept) > keeps {
				kept = kept[1:]
			}
		}
		behind := waiting
		if newest >= 0 {
			behind = min(c.Hold, waiting)
		}
		decide(n - behind)
		if due < 0 && labelled == min(c.Records, max(500, c.Records/10)) || n+1 == due {
			first := newest < 0
			train()
			tried = n
			due = n + 1 + c.Retrain.Rows
			if c.Retrain.Rows == 0 {
				due = n + 1 + int(c.Retrain.Share*float64(c.Records)+0.5)
			}
			if first && newest >= 0 {
				decide(n - min(c.Hold, waiting))
			}
		}
	}
	if newest < 0 && labelled > 0 && tried < len(apples)-1 {
		train()
	}
	decide(len(apples) - 1)
	return out
}

// Each row is judged when its time has come, by the newest snapshot there is then, out of fold if it was part of its
// window: as in a plain loop over the rows.
func TestRowsAreJudgedWhenTheirTimeHasCome(t *testing.T) {
	for _, c := range []struct {
		name   string
		n      int
		change func(*Config)
		fail   map[int]bool
		keeps  int // rows of the window when Bytes allows fewer than Records: six of eight blocks of rows of 44 bytes
	}{
		{"plain", 3000, func(c *Config) {}, nil, 0},
		{"fewer rows than the first fit wants", 400, func(c *Config) {}, nil, 0},
		{"a hold", 3000, func(c *Config) { c.Hold = 77 }, nil, 0},
		{"a hold over several retrains", 3000, func(c *Config) { c.Hold = 333 }, nil, 0},
		{"a hold longer than the window", 5000, func(c *Config) { c.Hold = 1500 }, nil, 0},
		{"a hold longer than the input", 1500, func(c *Config) { c.Hold = 10_000 }, nil, 0},
		{"a count", 3000, func(c *Config) { c.Retrain = Every{Rows: 333} }, nil, 0},
		{"a retrain at every row", 700, func(c *Config) { c.Retrain = Every{Rows: 1} }, nil, 0},
		{"less memory than the first fit wants", 3000, func(c *Config) { c.Bytes = 36 * 300 }, nil, 180},
		{"less memory than the hold wants", 3000, func(c *Config) { c.Bytes = 36 * 1200; c.Hold = 1400 }, nil, 732},
		{"a small window", 3000, func(c *Config) { c.Records = 100; c.Hold = 7 }, nil, 0},
		{"the first fits fail", 3000, func(c *Config) {}, map[int]bool{0: true, 1: true}, 0},
		{"all fits fail", 2000, func(c *Config) { c.Retrain = Every{Rows: 500} }, map[int]bool{0: true, 1: true, 2: true, 3: true, 4: true}, 0},
		{"the last fit at the very end fails", 542, func(c *Config) {}, map[int]bool{0: true}, 0},
		{"a later fit fails", 3000, func(c *Config) { c.Hold = 60 }, map[int]bool{3: true, 4: true}, 0},
	} {
		t.Run(c.name, func(t *testing.T) {
			apples := pack(c.n, 0, 0, 1)
			for i := range apples {
				if i%13 == 5 {
					apples[i].observed = ""
				}
			}
			r := newRun(apples, func(k *Config) { k.Sliding, k.Records = true, 1000; c.change(k) })
			w := &witness{fail: c.fail}
			r.sweep.Learner = w
			r.do(t)
			if c.keeps == 0 {
				c.keeps = r.sweep.Config.Records
			}
			want := expected(apples, r.sweep.Config, c.keeps, c.fail)
			for i, tag := range r.store.tags {
				got := tag.Reason.String()
				switch tag.Score {
				case asOwn:
					got = tag.Snapshot + " own"
				case asFresh:
					got = tag.Snapshot + " fresh"
				}
				if got != want[i] {
					t.Fatalf("row %d: %s, want %s", i, got, want[i])
				}
			}
			failed := 0
			for k := range w.fits {
				if c.fail[k] {
					failed++
				}
			}
			if got := r.report.Retrains; got.Failed != failed || got.Cold+got.Warm != len(w.fits)-failed {
				t.Errorf("%+v, %d fits of which %d failed", got, len(w.fits), failed)
			}
		})
	}
}

// With the whole input as one window every sampled row has the score of the model that did not see its label, all
// others that of the snapshot, and there is one snapshot.
func TestWholeInputIsJudgedByOneSnapshot(t *testing.T) {
	for _, records := range []int{100, 999, 1000, 20_000} {
		r := newRun(pack(1000, 0, 0, 1), func(c *Config) { c.Records = records })
		w := &witness{}
		r.sweep.Learner = w
		r.do(t)
		own := 0
		for i, tag := range r.store.tags {
			want := asFresh
			if w.fits[0][model.Key(int64(i))] {
				want = asOwn
				own++
			}
			if tag.Score != want || tag.Snapshot != "fit 0" {
				t.Fatalf("row %d has score %v of %s, want %v", i, tag.Score, tag.Snapshot, want)
			}
		}
		if own != min(records, 1000) || len(w.fits) != 1 || r.report.Window.Sampled != (records < 1000) {
			t.Errorf("%d rows trained on in %d fits, sampled: %v; want %d", own, len(w.fits), r.report.Window.Sampled, min(records, 1000))
		}
	}
}

// A span is sampled, and a share of it is a share of the rows that the sample stands for.
func TestPaceFollowsTheRowsOfTheSpan(t *testing.T) {
	r := newRun(pack(20_000, 0, 0, 1), func(c *Config) { c.Sliding, c.Records, c.Span = true, 500, 4000e9; c.Retrain = Every{Share: 0.1} })
	w := &witness{}
	r.sweep.Learner = w
	r.do(t)
	// The first at 500, then a tenth of what the window stands for: 50 up to 100 and so on to 400 a retrain, so about
	// ln(4000/500)/ln(1.1) = 22 until the span is full, and 16,000/400 = 40 from there.
	if got := len(w.fits); got < 55 || got > 70 {
		t.Errorf("%d retrains, about 62 expected", got)
	}
	for k, keys := range w.fits {
		if len(keys) != 500 {
			t.Errorf("fit %d had %d rows", k, len(keys))
		}
	}
	if !r.report.Window.Sampled {
		t.Error("the report does not say that the window was sampled")
	}
}
