package filter

import (
	"context"
	"fmt"
	"io"
	"os"
	"runtime"
	"slices"
	"sync/atomic"
	"testing"
	"time"
)

// TestMain counts the goroutines once all tests are done: whoever starts one waits for it.
func TestMain(m *testing.M) {
	code := m.Run()
	for end := time.Now().Add(5 * time.Second); runtime.NumGoroutine() > 1 && time.Now().Before(end); {
		runtime.Gosched() // the last test's own goroutine may be about to end
	}
	if n := runtime.NumGoroutine(); n > 1 && code == 0 {
		buf := make([]byte, 1<<16)
		fmt.Printf("%d goroutines are left:\n%s\n", n, buf[:runtime.Stack(buf, true)])
		code = 1
	}
	os.Exit(code)
}

// belt is a Source that gives the same batch of rows over and over without making any memory.
type belt struct {
	batch Batch
	left  int
}

func newBelt(rows, batches int) *belt {
	var c crate
	c.open = new(atomic.Int64)
	b := c.batch(pack(rows, 0.1, 0, 1))
	return &belt{batch: Batch{Table: b.Table, Times: b.Times, Release: func() {}}, left: batches}
}

func (b *belt) Next(context.Context) (*Batch, error) {
	if b.left--; b.left < 0 {
		return nil, io.EOF
	}
	out := b.batch // the one allocation a batch
	b.batch.First += int64(b.batch.Rows())
	return &out, nil
}

func (b *belt) Close() error { return nil }

// sieve is a Sink that keeps nothing.
type sieve struct{ rows int }

func (s *sieve) Deliver(_ context.Context, b *Batch, tags []Tag) error {
	s.rows += len(tags)
	return nil
}
func (s *sieve) Commit(context.Context) error { return nil }
func (s *sieve) Close() error                 { return nil }

// allocations counts those of a sweep over so many batches.
func allocations(t *testing.T, batches int, change func(*Config)) float64 {
	const rows = 2048
	belts := []*belt{newBelt(rows, batches), newBelt(rows, batches), newBelt(rows, batches), newBelt(rows, batches)}
	return testing.AllocsPerRun(1, func() {
		r := newRun(nil, change)
		r.sweep.Sink, r.sweep.Learner = &sieve{}, &witness{}
		r.sweep.Open = func(context.Context) (Source, error) {
			b := belts[0]
			belts = belts[1:]
			return b, nil
		}
		if _, err := r.sweep.Run(context.Background()); err != nil {
			t.Fatal(err)
		}
	})
}

// After the first batches no row costs an allocation, and a batch a handful: a hundred more batches of 2,048 rows.
func TestRowsAllocateNothing(t *testing.T) {
	if raceDetector {
		t.Skip("the race detector allocates")
	}
	for name, change := range map[string]func(*Config){
		"whole":  func(c *Config) { c.Records = 2000; c.Mode = Divert },
		"slides": func(c *Config) { c.Sliding, c.Records, c.Hold = true, 2000, 1000; c.Retrain = Every{Rows: 1 << 30} },
	} {
		few, many := allocations(t, 20, change), allocations(t, 120, change)
		if perBatch := (many - few) / 100; perBatch > 12 {
			t.Errorf("%s: %.1f allocations a batch of 2,048 rows", name, perBatch)
		}
	}
}

// The clock is injected: a report's times add up what it said.
func TestTimesAreTheClocks(t *testing.T) {
	clock := time.Time{}
	s := newStopwatch(func() time.Time { clock = clock.Add(time.Second); return clock })
	start := s.now()
	s.add("write", start)
	s.enter("fit")
	s.enter("fit/chains")
	s.enter("fit/chains")
	s.enter("fit/noise")
	s.enter("")
	s.add("read", s.now())
	want := []Spent{{"read", 1}, {"fit", 1}, {"fit/chains", 2}, {"fit/noise", 1}, {"write", 1}}
	if got := s.phases(); !slices.Equal(got, want) {
		t.Errorf("%v, want %v", got, want)
	}
}

func TestProgressRises(t *testing.T) {
	for name, mode := range modes() {
		r := newRun(pack(3000, 0.1, 0, 1), mode)
		last := map[string]int64{}
		r.sweep.Progress = func(phase string, done, total int64) {
			if done < last[phase] || total != 0 && total != 3000 || total != 0 && done > total {
				t.Errorf("%s: %s %d of %d after %d", name, phase, done, total, last[phase])
			}
			last[phase] = done
		}
		r.do(t)
		for phase, done := range last {
			if done != 3000 {
				t.Errorf("%s: %s ends at %d", name, phase, done)
			}
		}
		if len(last) == 0 {
			t.Errorf("%s: nothing was told", name)
		}
	}
}

// Each snapshot is given away once, in order, and the report names the last.
func TestSnapshotsAreGivenAway(t *testing.T) {
	r := newRun(pack(3000, 0, 0, 1), modes()["sliding"])
	w := &witness{fail: map[int]bool{2: true}}
	var ids []string
	r.sweep.Learner, r.sweep.OnSnapshot = w, func(s Snapshot) { ids = append(ids, s.ID()) }
	r.do(t)
	if len(ids) != len(w.fits)-1 || ids[1] != "fit 1" || ids[2] != "fit 3" || ids[len(ids)-1] != r.report.Snapshot {
		t.Errorf("%v, report %s", ids, r.report.Snapshot)
	}
}

// BenchmarkSweep carries batches of 4,096 rows through with a learner that costs nothing: what the pipeline itself
// takes.
func BenchmarkSweep(b *testing.B) {
	for name, change := range map[string]func(*Config){
		"whole":  func(c *Config) { c.Mode = Divert },
		"slides": func(c *Config) { c.Sliding = true },
	} {
		b.Run(name, func(b *testing.B) {
			rows := 0
			for b.Loop() {
				r := newRun(nil, change)
				s := &sieve{}
				r.sweep.Sink, r.sweep.Learner = s, &witness{}
				r.sweep.Open = func(context.Context) (Source, error) { return newBelt(4096, 100), nil }
				if _, err := r.sweep.Run(context.Background()); err != nil {
					b.Fatal(err)
				}
				rows += s.rows
			}
			b.ReportMetric(float64(rows)/b.Elapsed().Seconds(), "rows/s")
		})
	}
}
