package filter

import (
	"context"
	"errors"
	"fmt"
	"hash/fnv"
	"io"
	"math"
	"math/rand/v2"
	"slices"
	"sync"
	"sync/atomic"
	"time"

	"labelweir/model"
)

// apple is one record of an invented packing line: how big it is, its true grade and the one it was given.
type apple struct {
	diameter float64
	cultivar string
	truth    string
	observed string // empty: none
	grader   string
	time     int64
}

// grades are the classes of the line, by rising diameter.
func grades() []string { return []string{"cull", "second", "first"} }

// pack makes n apples. A share of them have another grade than the true one. From row turn on, if it is above 0, small
// apples are sold as first and big ones as cull: the grades have taken on another meaning.
func pack(n int, share float64, turn int, seed uint64) []apple {
	rng := rand.New(rand.NewPCG(seed, 1))
	list := make([]apple, n)
	for i := range list {
		g := rng.IntN(3)
		a := apple{diameter: float64(g)*10 + rng.NormFloat64(), cultivar: fmt.Sprintf("cultivar-%d", rng.IntN(4)),
			grader: fmt.Sprintf("grader-%d", rng.IntN(3)), time: int64(i) * 1e9}
		if turn > 0 && i >= turn {
			g = 2 - g
		}
		a.truth = grades()[g]
		a.observed = a.truth
		if rng.Float64() < share {
			a.observed = grades()[(g+1+rng.IntN(2))%3]
		}
		list[i] = a
	}
	return list
}

// crate is a Source over apples, cut into batches whose sizes take turns. It spoils a batch's memory on its release.
type crate struct {
	apples  []apple
	sizes   []int
	at, n   int
	untimed bool
	failAt  int // batch whose Next fails; 0: none
	table   model.Table
	open    *atomic.Int64 // batches and readings not given back
}

func (c *crate) Next(ctx context.Context) (*Batch, error) {
	if err := ctx.Err(); err != nil {
		return nil, err
	}
	if c.at == len(c.apples) {
		return nil, io.EOF
	}
	if c.n++; c.n == c.failAt {
		return nil, errSource
	}
	size := min(c.sizes[c.n%len(c.sizes)], len(c.apples)-c.at)
	b := c.batch(c.apples[c.at : c.at+size])
	c.at += size
	return b, nil
}

var errSource, errSink = errors.New("belt stopped"), errors.New("store full")

func (c *crate) batch(apples []apple) *Batch {
	n := len(apples)
	t := c.table
	t.Columns = []model.Column{
		{Name: "diameter_mm", Kind: model.Number, Size: 1, Values: make([]float64, n)},
		{Name: "cultivar", Kind: model.Category, Size: 1, Codes: make([]int32, n)},
	}
	t.Labels, t.Sources, t.Keys = make([]int32, n), make([]int32, n), make([]uint64, n)
	times := make([]int64, n)
	var levels []string
	if len(c.table.Columns) > 0 {
		levels = c.table.Columns[1].Levels
	}
	for i, a := range apples {
		t.Columns[0].Values[i], t.Columns[1].Codes[i] = a.diameter, code(&levels, a.cultivar)
		t.Labels[i], t.Sources[i], times[i] = code(&t.Classes, a.observed), code(&t.SourceNames, a.grader), a.time
		t.Keys[i] = model.Key(int64(c.at + i))
	}
	t.Columns[1].Levels = levels
	c.table = t
	c.open.Add(1)
	b := &Batch{First: int64(c.at), Table: &t, Times: times, Payload: apples}
	if c.untimed {
		b.Times = nil
	}
	var once sync.Once
	b.Release = func() {
		once.Do(func() {
			c.open.Add(-1)
			for i := range t.Labels {
				t.Columns[0].Values[i], t.Labels[i], times[i] = math.NaN(), 99, 0
			}
			clear(t.Keys)
		})
	}
	return b
}

func (c *crate) Close() error { c.open.Add(-1); return nil }

// code gives the code of name, new ones at the end; −1 for an empty one.
func code(list *[]string, name string) int32 {
	if name == "" {
		return -1
	}
	if i := slices.Index(*list, name); i >= 0 {
		return int32(i)
	}
	*list = append(*list, name)
	return int32(len(*list) - 1)
}

// store is a Sink that keeps the apples and tags.
type store struct {
	apples            []apple
	tags              []Tag
	batches, failAt   int
	committed, closed bool
}

func (s *store) Deliver(ctx context.Context, b *Batch, tags []Tag) error {
	if s.batches++; s.batches == s.failAt {
		return errSink
	}
	s.apples = append(s.apples, b.Payload.([]apple)...)
	s.tags = append(s.tags, tags...)
	return ctx.Err()
}

func (s *store) Commit(context.Context) error { s.committed = true; return nil }
func (s *store) Close() error                 { s.closed = true; return nil }

// meanLearner grades by the nearest mean diameter of a class; labels within a table decide the means, in five folds.
type meanLearner struct {
	fits      int
	tables    []*model.Table // fitted on
	err       map[int]error  // by number of the fit, from 1
	threshold float64
	without   string // a class that is never learned
}

// fail has the numbered fits fail for want of rows.
func (l *meanLearner) fail(fits []int) {
	l.err = map[int]error{}
	for _, k := range fits {
		l.err[k] = model.ErrOneClass
	}
}

func (l *meanLearner) Fit(ctx context.Context, t *model.Table) (*Fit, error) {
	l.fits++
	l.tables = append(l.tables, t)
	if err := l.err[l.fits]; err != nil {
		return nil, err
	}
	s := &means{at: map[string]float64{}, warm: l.fits > 1, rows: t.Rows(), threshold: l.threshold, without: l.without}
	if s.threshold == 0 {
		s.threshold = 0.95
	}
	s.learn(t, -1)
	if t.Rows() < model.MinRows {
		return nil, model.ErrTooFew
	}
	if len(s.classes) < 2 {
		return nil, model.ErrOneClass
	}
	f := &Fit{Snapshot: s, Scores: make([]model.Score, t.Rows())}
	for fold := range 5 {
		part := &means{classes: s.classes, at: map[string]float64{}, without: l.without}
		part.learn(t, fold)
		for i := range f.Scores {
			if int(t.Keys[i]%5) == fold {
				f.Scores[i] = part.judge(t, i)
			}
		}
	}
	return f, nil
}

// means is its snapshot.
type means struct {
	classes   []string // sorted
	at        map[string]float64
	counts    []int
	warm      bool
	rows      int
	threshold float64
	without   string
}

// learn takes the means over the rows outside a fold, in table order.
func (m *means) learn(t *model.Table, fold int) {
	sum, n := map[string]float64{}, map[string]int{}
	for i, l := range t.Labels {
		x := t.Columns[0].Values[i]
		if l >= 0 && int(t.Keys[i]%5) != fold && !math.IsInf(x, 0) && t.Classes[l] != m.without {
			sum[t.Classes[l]] += x
			n[t.Classes[l]]++
		}
	}
	for name, k := range n {
		m.at[name] = sum[name] / float64(k)
		if fold < 0 {
			m.classes = append(m.classes, name)
		}
	}
	slices.Sort(m.classes)
	for _, name := range m.classes {
		m.counts = append(m.counts, n[name])
	}
}

func (m *means) judge(t *model.Table, i int) model.Score {
	none := model.Score{P: math.NaN(), Margin: math.NaN(), Implied: -1}
	x := t.Columns[0].Values[i]
	switch {
	case t.Labels[i] < 0:
		none.Reason = model.NoLabel
		return none
	case math.IsInf(x, 0):
		none.Reason = model.NotFinite
		return none
	}
	if _, ok := m.at[t.Classes[t.Labels[i]]]; !ok {
		none.Reason = model.NewClass
		return none
	}
	own, other, implied, best := 0.0, math.Inf(1), -1, math.Inf(1)
	for k, name := range m.classes {
		d := math.Abs(x - m.at[name])
		if d < best {
			best, implied = d, k
		}
		if name == t.Classes[t.Labels[i]] {
			own = d
		} else {
			other = min(other, d)
		}
	}
	margin := 2 * (other - own)
	return model.Score{P: 1 / (1 + math.Exp(margin)), Margin: margin, Implied: int32(implied)}
}

func (m *means) ID() string {
	h := fnv.New64a()
	for _, name := range m.classes {
		fmt.Fprintf(h, "%s %v;", name, m.at[name])
	}
	return fmt.Sprintf("%012x", h.Sum64()&(1<<48-1))
}

func (m *means) Facts() *model.Facts {
	f := &model.Facts{Rows: m.rows, Classes: m.classes, ClassRows: m.counts, Threshold: m.threshold, Warm: m.warm,
		Choice: model.Choice{Encoder: "diameter", Why: "it is the only one"},
		Chains: []model.Chain{{Name: "mean", Tried: 5, Won: 5}}}
	f.Noise = model.Noise{Share: model.Estimate{Value: 0.1, Low: 0.05, High: 0.2, Rows: m.rows}, Model: "single"}
	return f
}

func (m *means) WriteTo(w io.Writer) (int64, error) {
	n, err := io.WriteString(w, m.ID())
	return int64(n), err
}

func (m *means) NewScorer() Scorer { return m }

func (m *means) Score(t *model.Table, lo, hi int, dst []model.Score) error {
	for i := lo; i < hi; i++ {
		dst[i-lo] = m.judge(t, i)
	}
	return nil
}

// run is one sweep over apples with the fakes, and what came of it.
type run struct {
	sweep  Sweep
	crate  func() *crate
	store  *store
	learn  *meanLearner
	open   atomic.Int64
	report *Report
}

// check is what the helpers need of a test; rapid's has it, too.
type check interface {
	Helper()
	Errorf(format string, args ...any)
	Fatalf(format string, args ...any)
	Fatal(args ...any)
}

// newRun sets one up: batches of 100, two workers, a clock that stands still.
func newRun(apples []apple, change func(*Config)) *run {
	r := &run{store: &store{}, learn: &meanLearner{}}
	r.crate = func() *crate { return &crate{apples: apples, sizes: []int{100}, open: &r.open} }
	c := Default()
	c.Workers = 2
	if change != nil {
		change(&c)
	}
	r.sweep = Sweep{Config: c, Sink: r.store, Learner: r.learn, Now: standing,
		Open: func(context.Context) (Source, error) { r.open.Add(1); return r.crate(), nil }}
	return r
}

// do runs it, and fails the test on an error or when anything was not given back.
func (r *run) do(t check) *run {
	t.Helper()
	report, err := r.sweep.Run(context.Background())
	if err != nil {
		t.Fatal(err)
	}
	r.report = report
	if n := r.open.Load(); n != 0 {
		t.Errorf("%d batches or readings were not given back", n)
	}
	if !r.store.committed || !r.store.closed {
		t.Errorf("committed %v, closed %v", r.store.committed, r.store.closed)
	}
	return r
}

func standing() time.Time { return time.Time{} }
