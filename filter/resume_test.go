package filter

import (
	"bytes"
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"math/rand/v2"
	"os"
	"slices"
	"strings"
	"testing"
	"time"

	"labelweir/model"

	"pgregory.net/rapid"
)

// paper is a JournalFile in memory.
type paper struct {
	b    []byte
	full int // bytes from which on writes fail; 0: never
}

var errPaper = errors.New("paper full")

func (p *paper) ReadAt(b []byte, at int64) (int, error) { return bytes.NewReader(p.b).ReadAt(b, at) }

func (p *paper) WriteAt(b []byte, at int64) (int, error) {
	end := int(at) + len(b)
	if p.full > 0 && end > p.full {
		return 0, errPaper
	}
	for len(p.b) < end {
		p.b = append(p.b, 0)
	}
	return copy(p.b[at:], b), nil
}

func (p *paper) Truncate(n int64) error { p.b = p.b[:n]; return nil }
func (p *paper) Sync() error            { return nil }

// tiring is a learner that, as the real one, searches anew now and then, and whose other fits depend on how many came
// since, and how many in all.
type tiring struct {
	*meanLearner
	every       int // a search after so many fits that gave a snapshot
	all, since  uint64
	searchAgain bool
	made        int // calls of Fit
}

func (l *tiring) Fit(ctx context.Context, t *model.Table) (*Fit, error) {
	l.made++
	l.tables = nil // only the tests of what is trained on look at them
	f, err := l.meanLearner.Fit(ctx, t)
	if err != nil {
		return nil, err
	}
	cold := l.since == 0 || l.searchAgain || int(l.since) >= l.every
	if l.searchAgain = false; cold {
		l.since = 0
	}
	s := &tired{means: f.Snapshot.(*means)}
	s.warm = !cold
	if s.wear = 0; !cold {
		s.wear = float64(l.all)/1000 + float64(l.since)/7
	}
	l.all, l.since = l.all+1, l.since+1
	s.blur(f.Scores)
	return &Fit{s, f.Scores}, nil
}

func (l *tiring) Skip(n uint64) { l.all, l.since, l.searchAgain = n, 0, true }

func (l *tiring) Load(r io.Reader) (Snapshot, error) {
	s := &tired{means: &means{}}
	var state tiredState
	if err := json.NewDecoder(r).Decode(&state); err != nil {
		return nil, err
	}
	s.classes, s.at, s.counts, s.warm, s.rows, s.threshold, s.wear = state.Classes, state.At, state.Counts, state.Warm, state.Rows, state.Threshold, state.Wear
	return s, nil
}

type tired struct {
	*means
	wear float64
}

type tiredState struct {
	Classes         []string
	At              map[string]float64
	Counts          []int
	Warm            bool
	Rows            int
	Threshold, Wear float64
}

func (s *tired) blur(scores []model.Score) {
	for i := range scores {
		scores[i].Margin += s.wear
	}
}

func (s *tired) ID() string { return fmt.Sprintf("%s+%v", s.means.ID(), s.wear) }

func (s *tired) Facts() *model.Facts {
	f, k := s.means.Facts(), len(s.classes)
	f.Noise.ByClass = slices.Repeat([]model.Estimate{{Value: 0.1 + s.wear/100, Low: 0.05, High: 0.2, Rows: s.rows}}, k)
	f.Noise.Flip = slices.Repeat([][]model.Estimate{f.Noise.ByClass}, k)
	return f
}

func (s *tired) WriteTo(w io.Writer) (int64, error) {
	return 0, json.NewEncoder(w).Encode(tiredState{s.classes, s.at, s.counts, s.warm, s.rows, s.threshold, s.wear})
}

func (s *tired) NewScorer() Scorer { return s }

func (s *tired) Score(t *model.Table, lo, hi int, dst []model.Score) error {
	err := s.means.Score(t, lo, hi, dst)
	s.blur(dst)
	return err
}

// resumable is a run whose learner tires; f may be nil.
func resumable(t check, apples []apple, change func(*Config), fail []int, f *paper) (*run, *tiring) {
	t.Helper()
	r := newRun(apples, change)
	r.learn.fail(fail)
	l := &tiring{meanLearner: r.learn, every: 4}
	r.sweep.Learner = l
	if f != nil {
		j, err := OpenJournal(f, []Condition{{"seed", "1"}})
		if err != nil {
			t.Fatal(err)
		}
		r.sweep.Journal = j
	}
	return r, l
}

// interrupt runs until about so many rows are delivered, and tells how many calls of Fit there were.
func interrupt(t check, r *run, l *tiring, rows int64) int {
	t.Helper()
	ctx, cancel := context.WithCancel(context.Background())
	defer cancel()
	r.sweep.Progress = func(phase string, done, _ int64) {
		if phase != "read" && done >= rows {
			cancel()
		}
	}
	_, _ = r.sweep.Run(ctx) // with little input left it ends well
	if n := r.open.Load(); n != 0 {
		t.Errorf("%d batches or readings were not given back", n)
	}
	return l.made
}

// A sweep that is interrupted anywhere, once or twice, and goes on with its journal, whatever became of its end, gives
// what one in one go gives: under any settings, and with batches cut in another way.
func TestResumedSweepsGiveTheSame(t *testing.T) {
	took, saved := 0, 0
	rapid.Check(t, func(t *rapid.T) {
		apples := pack(rapid.IntRange(0, 3000).Draw(t, "rows"), rapid.Float64Range(0, 0.4).Draw(t, "wrong"),
			rapid.IntRange(0, 3000).Draw(t, "turn"), rapid.Uint64().Draw(t, "seed"))
		for i, every := 0, rapid.IntRange(2, 50).Draw(t, "unlabelled"); i < len(apples); i += every {
			apples[i].observed = ""
		}
		c := drawConfig(t)
		fail := rapid.SliceOfN(rapid.IntRange(1, 9), 0, 3).Draw(t, "failing fits")
		whole, _ := resumable(t, apples, func(k *Config) { *k = c }, fail, nil)
		want := whole.do(t).outcome(t)
		f := &paper{}
		again := func() (*run, *tiring) {
			r, l := resumable(t, apples, func(k *Config) { *k = c }, nil, f)
			skipped, _ := r.sweep.Journal.Taken()
			for _, k := range fail { // fits are numbered over the whole sweep
				if k > skipped {
					l.err[k-skipped] = model.ErrOneClass
				}
			}
			took += skipped
			sizes := rapid.SliceOfN(rapid.IntRange(0, 700), 1, 4).Draw(t, "sizes")
			crate := r.crate
			r.crate = func() *crateT { k := crate(); k.sizes = append(sizes, 1+len(sizes)); return k }
			return r, l
		}
		for range rapid.IntRange(1, 2).Draw(t, "interruptions") {
			r, l := again()
			saved += interrupt(t, r, l, rapid.Int64Range(0, 3000).Draw(t, "until"))
			if rapid.Bool().Draw(t, "cut") {
				f.b = f.b[:rapid.IntRange(0, len(f.b)).Draw(t, "to")]
			}
		}
		r, _ := again()
		if got := r.do(t).outcome(t); got != want {
			t.Fatalf("resumed it gives another result: %s", firstDifference(got, want))
		}
	})
	if took < 20 {
		t.Errorf("only %d trainings were taken from journals, of %d", took, saved)
	}
}

// drawConfig draws settings of any kind.
func drawConfig(t *rapid.T) Config {
	c := Default()
	c.Workers = rapid.IntRange(1, 3).Draw(t, "workers")
	c.Records = rapid.IntRange(50, 1000).Draw(t, "records")
	c.Bytes = rapid.SampledFrom([]int64{1 << 29, 44 * 64, 44 * 700}).Draw(t, "bytes")
	c.Mode = Mode(rapid.IntRange(0, 1).Draw(t, "mode"))
	c.Budget = rapid.Float64Range(0.001, 1).Draw(t, "budget")
	c.Cooldown = rapid.IntRange(1, 4).Draw(t, "cooldown")
	if c.Sliding = rapid.IntRange(0, 4).Draw(t, "sliding") > 0; c.Sliding {
		c.Hold = rapid.IntRange(0, 900).Draw(t, "hold")
		c.Span = time.Duration(rapid.SampledFrom([]int{0, 100, 1000}).Draw(t, "span")) * time.Second
		if c.Retrain = (Every{Rows: rapid.IntRange(40, 300).Draw(t, "every")}); rapid.Bool().Draw(t, "share") {
			c.Retrain = Every{Share: rapid.Float64Range(0.05, 1).Draw(t, "of the window")}
		}
	}
	return c
}

// What is resumed is not done again: of a sliding sweep the trainings of finished parts, of a whole input its only one.
func TestResumedSweepsTrainLess(t *testing.T) {
	apples := pack(4000, 0.1, 0, 3)
	for _, mode := range []string{"whole", "sliding", "hold"} {
		r, l := resumable(t, apples, modes()[mode], nil, nil)
		r.do(t)
		all := l.made
		f := &paper{}
		r, l = resumable(t, apples, modes()[mode], nil, f)
		interrupt(t, r, l, 3000)
		r, l = resumable(t, apples, modes()[mode], nil, f)
		taken, rows := r.sweep.Journal.Taken()
		r.do(t)
		if l.made+taken != all || taken == 0 || mode == "whole" && l.made > 0 || mode != "whole" && 2*l.made > all || rows < 2000 {
			t.Errorf("%s: %d trainings, of which %d up to row %d were taken over and %d made", mode, all, taken, rows, l.made)
		}
	}
}

// A byte changed anywhere in the journal gives an error that says so, or the right result; never another one.
func TestDamagedJournalsNeverMislead(t *testing.T) {
	for _, mode := range []func(*Config){
		func(c *Config) {
			c.Sliding, c.Records, c.Retrain, c.Hold, c.Mode = true, 60, Every{Rows: 20}, 5, Divert
		},
		func(c *Config) { c.Records = 60 },
	} {
		apples := pack(190, 0.2, 0, 3)
		r, _ := resumable(t, apples, mode, nil, nil)
		want := r.do(t).outcome(t)
		f := &paper{}
		r, l := resumable(t, apples, mode, nil, f)
		interrupt(t, r, l, 180)
		if taken, _ := mustOpen(t, f).Taken(); taken == 0 {
			t.Fatal("nothing to take over")
		}
		step, foreign := 19, 0 // the frames' own tests go through every byte
		if os.Getenv("LABELWEIR_LONG") != "" {
			step = 1
		}
		for at := 0; at < len(f.b); at += step {
			b := bytes.Clone(f.b)
			b[at] ^= byte(1 + at%255)
			if _, err := OpenJournal(&paper{b: bytes.Clone(b)}, []Condition{{"seed", "1"}}); err != nil {
				if !errors.Is(err, ErrForeignJournal) {
					t.Fatalf("byte %d: %v", at, err)
				}
				foreign++
				continue
			}
			r, _ := resumable(t, apples, mode, nil, &paper{b: b})
			if got := r.do(t).outcome(t); got != want {
				t.Fatalf("byte %d changed: %s", at, firstDifference(got, want))
			}
		}
		if foreign > 10 {
			t.Errorf("%d bytes make it a foreign file", foreign)
		}
	}
}

func mustOpen(t *testing.T, f *paper) *Journal {
	t.Helper()
	j, err := OpenJournal(f, []Condition{{"seed", "1"}})
	if err != nil {
		t.Fatal(err)
	}
	return j
}

// Rows that are not those of the journal are noticed, however they differ from them.
func TestJournalsOfOtherRowsAreRefused(t *testing.T) {
	apples := pack(3000, 0.1, 0, 3)
	for _, mode := range []string{"whole", "sliding", "hold"} {
		for name, change := range map[string]func([]apple) []apple{
			"a value":  func(l []apple) []apple { l[300].diameter++; return l },
			"a label":  func(l []apple) []apple { l[2000].observed = "windfall"; return l },
			"a source": func(l []apple) []apple { l[2000].grader = "somebody"; return l },
			"one more": func(l []apple) []apple { return append(l[:1], l...) },
			"the end":  func(l []apple) []apple { return l[:900] },
		} {
			f := &paper{}
			r, l := resumable(t, apples, modes()[mode], nil, f)
			interrupt(t, r, l, 2900)
			r, _ = resumable(t, change(slices.Clone(apples)), modes()[mode], nil, f)
			if _, err := r.sweep.Run(context.Background()); !errors.Is(err, ErrJournal) || r.store.committed || r.open.Load() != 0 {
				t.Errorf("%s, %s: got %v; committed %v", mode, name, err, r.store.committed)
			}
		}
	}
}

func TestOtherConditionsAreNamed(t *testing.T) {
	f := &paper{}
	other := []Condition{{"seed", "2"}}
	r, l := resumable(t, pack(3000, 0.1, 0, 3), modes()["sliding"], nil, f)
	interrupt(t, r, l, 0)
	if _, err := OpenJournal(f, other); err != nil {
		t.Errorf("there is no training to go on with: got %v", err)
	}
	r, l = resumable(t, pack(3000, 0.1, 0, 3), modes()["sliding"], nil, f)
	interrupt(t, r, l, 2900)
	before := bytes.Clone(f.b)
	for want, now := range map[string][]Condition{
		`seed "1", not "2"`: other,
		`mode "", not "x"`:  {{"seed", "1"}, {"mode", "x"}},
		`seed "1", not ""`:  {},
	} {
		_, err := OpenJournal(f, now)
		if other := (*OtherError)(nil); !errors.As(err, &other) || !strings.Contains(err.Error(), want) {
			t.Errorf("got %v, want %s", err, want)
		}
	}
	if !bytes.Equal(f.b, before) {
		t.Error("the journal was touched")
	}
}

func TestAJournalThatCantBeWrittenEndsTheSweep(t *testing.T) {
	for _, mode := range []string{"whole", "sliding"} {
		for _, room := range []int{5, 40, 200, 70_000} {
			r, _ := resumable(t, pack(4000, 0.1, 0, 3), modes()[mode], nil, &paper{full: room})
			if _, err := r.sweep.Run(context.Background()); err != errPaper || r.store.committed {
				t.Errorf("%s with room for %d bytes: got %v", mode, room, err)
			}
		}
	}
}

// The real model: interrupted and resumed, it gives the same scores as in one go.
func TestTheRealModelIsResumed(t *testing.T) {
	if raceDetector || testing.Short() {
		t.Skip("trains many models")
	}
	for name, change := range map[string]func(*Config){
		"whole":   func(c *Config) { c.Records = 200 },
		"sliding": func(c *Config) { c.Sliding, c.Records, c.Hold, c.Retrain = true, 100, 30, Every{Rows: 8} },
	} {
		rng := rand.New(rand.NewPCG(4, 4))
		apples := pack(470+rng.IntN(20), 0.1, 0, 8)
		make := func(f *paper) *run {
			r := newRun(apples, change)
			r.sweep.Learner = nil
			if f != nil {
				r.sweep.Journal = mustOpen(t, f)
			}
			return r
		}
		outcome := func(r *run) string {
			r.do(t).report.Times = nil // a training that was not needed took none
			return r.outcome(t)
		}
		want := outcome(make(nil))
		f := &paper{}
		r := make(f)
		interrupt(t, r, &tiring{}, 450)
		r = make(f)
		if taken, _ := r.sweep.Journal.Taken(); taken == 0 {
			t.Errorf("%s: nothing was taken over", name)
		}
		got := outcome(r)
		if got != want {
			t.Errorf("%s: %s", name, firstDifference(got, want))
		}
	}
}
