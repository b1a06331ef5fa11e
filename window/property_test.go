package window

import (
	"bytes"
	"fmt"
	"math/rand/v2"
	"testing"
	"time"

	"pgregory.net/rapid"
)

// machine runs a window and the naive slice side by side.
type machine struct {
	w     *Window
	n     *naive
	line  *line
	clock int64
}

func (m *machine) append(t *rapid.T) {
	n := rapid.IntRange(0, 120).Draw(t, "rows")
	rng := rand.New(rand.NewPCG(rapid.Uint64().Draw(t, "seed"), 11))
	table, first := m.line.table(n, func(i int) string {
		switch k := rng.IntN(40); {
		case k == 0:
			return ""
		case k < 3:
			return "cull"
		default:
			return fmt.Sprintf("grade-%d", k%3)
		}
	})
	times := make([]int64, n)
	for i := range times {
		m.clock += int64(rng.IntN(3)) * minute
		switch back := rng.IntN(31); back {
		case 0:
			times[i] = unknown
		case 1:
			times[i] = m.clock + 1_000_000*minute
		case 2:
			times[i] = m.clock - 1_000*minute
		default:
			times[i] = m.clock - int64(back%5)*minute
		}
	}
	m.n.append(table, first, times)
	for lo := 0; lo < n; { // in pieces, which must not matter
		hi := min(n, lo+rapid.IntRange(1, 50).Draw(t, "piece"))
		if err := m.w.Append(table, first, times, lo, hi); err != nil {
			t.Fatal(err)
		}
		lo = hi
	}
}

func (m *machine) restart(t *rapid.T) {
	var saved bytes.Buffer
	if n, err := m.w.WriteTo(&saved); err != nil || n != int64(saved.Len()) {
		t.Fatalf("saved %d of %d bytes: %v", n, saved.Len(), err)
	}
	w, err := Read(&saved)
	if err != nil {
		t.Fatal(err)
	}
	m.w = w
	if rapid.Bool().Draw(t, "another run") {
		m.line.restart()
	}
}

// check compares what the window shows with what the slice says.
func (m *machine) check(t *rapid.T) {
	if m.w.columns == nil {
		return
	}
	v := m.w.View()
	got := rowsOf(v.Table, func(i int) int64 { return v.Rows[i] })
	s := m.w.Stats()
	want := m.n.view(s.Limit)
	if len(got) != len(want) {
		t.Fatalf("%d rows, want %d", len(got), len(want))
	}
	for i := range want {
		g, w := got[i], want[i]
		if g.row != w.row || g.text != w.text || g.name != w.name || g.key != w.key {
			t.Fatalf("row %d is %+v, want %+v", i, g, w)
		}
		if v.Index(g.row) != i {
			t.Fatalf("row %d is at %d, not at %d", g.row, v.Index(g.row), i)
		}
	}
	if s.Bytes > m.n.p.Bytes {
		t.Fatalf("%d bytes stored, %d allowed", s.Bytes, m.n.p.Bytes)
	}
	if s.Late != m.n.late {
		t.Fatalf("%d late rows, want %d", s.Late, m.n.late)
	}
}

// The window and a slice of everything, cut down from the definition, show the same rows after any history.
func TestWindowAgreesWithASlice(t *testing.T) {
	roomy, tight := int64(1<<20), int64(300*60)
	for _, c := range []struct {
		name string
		p    Policy
	}{
		{"latest", Policy{Records: 100, Bytes: roomy, Keep: Latest, Floor: 5, Seed: 1}},
		{"latest within bytes", Policy{Records: 1000, Bytes: tight, Keep: Latest, Seed: 1}},
		{"everything", Policy{Records: 50, Bytes: roomy, Keep: Uniform, Floor: 5, Seed: 2}},
		{"everything within bytes", Policy{Records: 1000, Bytes: tight, Keep: Uniform, Floor: 5, Seed: 2}},
		{"span", Policy{Records: 40, Span: 100 * time.Minute, Bytes: roomy, Keep: Uniform, Floor: 4, Seed: 3}},
		{"span, floor of none", Policy{Records: 40, Span: 300 * time.Minute, Bytes: roomy, Keep: Uniform, Seed: 3}},
		{"span within bytes", Policy{Records: 500, Span: 5000 * time.Minute, Bytes: tight, Keep: Uniform, Floor: 9, Seed: 4}},
		{"one row", Policy{Records: 1, Span: 100 * time.Minute, Bytes: tight, Keep: Uniform, Floor: 9, Seed: 4}},
	} {
		if raceDetector && c.p.Span == NoSpan { // one goroutine: it has nothing to find here, and the rest is enough
			continue
		}
		t.Run(c.name, func(t *testing.T) {
			rapid.Check(t, func(t *rapid.T) {
				w, err := New(c.p)
				if err != nil {
					t.Fatal(err)
				}
				m := &machine{w: w, line: newLine(rapid.Uint64().Draw(t, "seed")),
					n: &naive{p: c.p, now: unknown, names: map[string]bool{}}}
				t.Repeat(map[string]func(*rapid.T){"append": m.append, "restart": m.restart, "": m.check})
			})
		})
	}
}
