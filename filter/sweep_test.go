package filter

import (
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"math"
	"slices"
	"strings"
	"testing"

	"labelweir/model"
)

// outcome is what a sweep leaves, as text: every tag in order, and the report.
func (r *run) outcome(t check) string {
	t.Helper()
	var b strings.Builder
	for i, tag := range r.store.tags {
		fmt.Fprintf(&b, "%d %v %v %s %s %v %v %v\n", i, tag.Score, tag.Margin, tag.Implied, tag.Snapshot, tag.Verdict, tag.Reason, tag.Divert)
	}
	j, err := json.Marshal(r.report)
	if err != nil {
		t.Fatal(err)
	}
	return b.String() + string(j)
}

// modes are the ways to sweep that tests go through.
func modes() map[string]func(*Config) {
	slide := func(c *Config) { c.Sliding, c.Records = true, 1000 }
	return map[string]func(*Config){
		"whole":         func(c *Config) {},
		"whole sampled": func(c *Config) { c.Records = 300 },
		"divert":        func(c *Config) { c.Mode = Divert },
		"sliding":       slide,
		"hold":          func(c *Config) { slide(c); c.Hold = 130 },
		"long hold":     func(c *Config) { slide(c); c.Hold = 2000 },
		"every 77":      func(c *Config) { slide(c); c.Retrain = Every{Rows: 77}; c.Hold = 5; c.Mode = Divert },
		"span":          func(c *Config) { slide(c); c.Records = 600; c.Span = 1500e9 },
		"little memory": func(c *Config) { slide(c); c.Bytes = 36 * 400; c.Hold = 300 },
	}
}

// Every record read is delivered once, in order and unchanged, and the meters say so.
func TestNothingIsLostOrDoubled(t *testing.T) {
	for name, mode := range modes() {
		for _, n := range []int{0, 1, 49, 700, 3000} {
			t.Run(fmt.Sprint(name, " ", n), func(t *testing.T) {
				apples := pack(n, 0.1, 0, 1)
				for i := range apples {
					if i%17 == 3 {
						apples[i].observed = ""
					}
				}
				r := newRun(apples, mode).do(t)
				if !slices.Equal(r.store.apples, apples) || len(r.store.tags) != n {
					t.Errorf("%d records and %d tags came out, not the %d that went in", len(r.store.apples), len(r.store.tags), n)
				}
				checkMeters(t, r)
			})
		}
	}
}

// checkMeters counts the delivered tags itself and compares.
func checkMeters(t check, r *run) {
	t.Helper()
	var want Rows
	for _, tag := range r.store.tags {
		want.In++
		if tag.Divert {
			want.Quarantine++
		} else {
			want.Tagged++
		}
		if (tag.Verdict == Unscored) != (tag.Reason != model.Scored) || math.IsNaN(tag.Score) != (tag.Verdict == Unscored) {
			t.Fatalf("contradictory tag %+v", tag)
		}
		v, u := &want.Verdicts, &want.Reasons
		*[]*int64{&v.Pass, &v.Suspect, &v.Quarantine, &v.Unscored}[tag.Verdict]++
		*[]*int64{&want.Scored, &u.NoLabel, &u.NewClass, &u.NotFinite, &u.WarmingUp, &u.InputsChanged}[tag.Reason]++
	}
	if got := r.report.Rows; got != want {
		t.Errorf("meters %+v, want %+v", got, want)
	}
}

// The same rows give the same bytes, however they come in batches and however many workers judge them.
func TestBatchesAndWorkersDoNotShow(t *testing.T) {
	apples := pack(6000, 0.12, 4000, 3) // the grades change their meaning at 4,000, so that the breaker has its part
	for name, mode := range modes() {
		t.Run(name, func(t *testing.T) {
			want := newRun(apples, mode).do(t).outcome(t)
			for _, c := range []struct {
				workers int
				sizes   []int
			}{{1, []int{6000}}, {5, []int{1}}, {3, []int{7, 1000, 0, 93}}, {2, []int{3999, 2}}} {
				r := newRun(apples, mode)
				r.sweep.Config.Workers = c.workers
				crate := r.crate
				r.crate = func() *crateT { k := crate(); k.sizes = c.sizes; return k }
				if got := r.do(t).outcome(t); got != want {
					t.Errorf("%d workers, batches of %v: %s", c.workers, c.sizes, firstDifference(got, want))
				}
			}
		})
	}
}

type crateT = crate

func firstDifference(got, want string) string {
	g, w := strings.Split(got, "\n"), strings.Split(want, "\n")
	for i := range min(len(g), len(w)) {
		if g[i] != w[i] {
			return fmt.Sprintf("\n%.600s\ninstead of\n%.600s", g[i], w[i])
		}
	}
	return "another number of lines"
}

func TestErrorsLeaveNothingBehind(t *testing.T) {
	stop := errors.New("learner broken")
	for _, c := range []struct {
		name   string
		change func(*run)
		want   error
	}{
		{"configuration", func(r *run) { r.sweep.Config.Budget = 0 }, ErrConfig},
		{"open", func(r *run) {
			r.sweep.Open = func(context.Context) (Source, error) { return nil, errSource }
		}, errSource},
		{"source at once", func(r *run) { r.failSource(1) }, errSource},
		{"source later", func(r *run) { r.failSource(9) }, errSource},
		{"sink at once", func(r *run) { r.store.failAt = 1 }, errSink},
		{"sink later", func(r *run) { r.store.failAt = 9 }, errSink},
		{"sink at the end", func(r *run) { r.store.failAt = 30 }, errSink},
		{"learner", func(r *run) { r.learn.err = map[int]error{1: stop} }, stop},
	} {
		for name, mode := range modes() {
			t.Run(name+", "+c.name, func(t *testing.T) {
				r := newRun(pack(3000, 0.1, 0, 1), mode)
				c.change(r)
				report, err := r.sweep.Run(context.Background())
				if !errors.Is(err, c.want) || report != nil {
					t.Errorf("report %v, error %v, want %v", report, err, c.want)
				}
				if strings.Count(err.Error(), c.want.Error()) != 1 {
					t.Errorf("said more than once: %v", err)
				}
				if r.store.committed || !r.store.closed || r.open.Load() != 0 {
					t.Errorf("committed %v, closed %v, %d not given back", r.store.committed, r.store.closed, r.open.Load())
				}
			})
		}
	}
}

func (r *run) failSource(batch int) {
	crate := r.crate
	r.crate = func() *crateT { k := crate(); k.failAt = batch; return k }
}

// Whenever the context ends, the run ends with its error alone, and nothing is left behind.
func TestCancelEndsTheRun(t *testing.T) {
	for name, mode := range modes() {
		for _, after := range []int{0, 1, 5, 20} {
			t.Run(fmt.Sprint(name, " ", after), func(t *testing.T) {
				ctx, cancel := context.WithCancel(context.Background())
				defer cancel()
				r := newRun(pack(3000, 0.1, 0, 1), mode)
				n := 0
				r.sweep.Progress = func(string, int64, int64) {
					if n++; n > after {
						cancel()
					}
				}
				if after == 0 {
					cancel()
				}
				_, err := r.sweep.Run(ctx)
				if err != context.Canceled {
					t.Errorf("got %v", err)
				}
				if r.store.committed || !r.store.closed || r.open.Load() != 0 {
					t.Errorf("committed %v, closed %v, %d not given back", r.store.committed, r.store.closed, r.open.Load())
				}
			})
		}
	}
}
