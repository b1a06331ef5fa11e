package filter

import (
	"slices"
	"testing"
	"time"

	"pgregory.net/rapid"
)

// Under any settings, two layouts of the same rows and two numbers of workers give the same bytes, every record comes
// out once, and the meters say so.
func TestLayoutNeverShows(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		apples := pack(rapid.IntRange(0, 2500).Draw(t, "rows"), rapid.Float64Range(0, 0.4).Draw(t, "wrong"),
			rapid.IntRange(0, 2500).Draw(t, "turn"), rapid.Uint64().Draw(t, "seed"))
		for i, every := 0, rapid.IntRange(2, 50).Draw(t, "unlabelled"); i < len(apples); i += every {
			apples[i].observed = ""
		}
		c := Default()
		c.Records = rapid.IntRange(1, 1500).Draw(t, "records")
		c.Bytes = rapid.SampledFrom([]int64{1 << 29, 44 * 64, 44 * 700}).Draw(t, "bytes")
		c.Mode = Mode(rapid.IntRange(0, 1).Draw(t, "mode"))
		c.Budget = rapid.Float64Range(0.001, 1).Draw(t, "budget")
		c.Cooldown = rapid.IntRange(1, 4).Draw(t, "cooldown")
		if c.Sliding = rapid.Bool().Draw(t, "sliding"); c.Sliding {
			c.Hold = rapid.IntRange(0, 900).Draw(t, "hold")
			c.Span = time.Duration(rapid.SampledFrom([]int{0, 100, 1000}).Draw(t, "span")) * time.Second
			if c.Retrain = (Every{Rows: rapid.IntRange(40, 600).Draw(t, "every")}); rapid.Bool().Draw(t, "share") {
				c.Retrain = Every{Share: rapid.Float64Range(0.05, 1).Draw(t, "of the window")}
			}
		}
		fail := rapid.SliceOfN(rapid.IntRange(1, 6), 0, 3).Draw(t, "failing fits")
		run := func() string {
			r := newRun(apples, func(k *Config) { *k = c })
			r.sweep.Config.Workers = rapid.IntRange(1, 4).Draw(t, "workers")
			r.learn.fail(fail)
			sizes := rapid.SliceOfN(rapid.IntRange(0, 700), 1, 4).Draw(t, "sizes")
			crate := r.crate
			r.crate = func() *crateT { k := crate(); k.sizes = append(sizes, 1+len(sizes)); return k }
			r.do(t)
			if !slices.Equal(r.store.apples, apples) {
				t.Fatalf("%d records came out, not the %d that went in", len(r.store.apples), len(apples))
			}
			checkMeters(t, r)
			return r.outcome(t)
		}
		if a, b := run(), run(); a != b {
			t.Fatalf("layouts show: %s", firstDifference(a, b))
		}
	})
}
