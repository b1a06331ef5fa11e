package window

import (
	"fmt"
	"math/rand/v2"
	"slices"
	"sort"
	"time"

	"labelweir/model"
)

// line makes tables of an invented packing line: a number, a category and a vector of two.
type line struct {
	rng     *rand.Rand
	row     int64
	classes []string
	levels  []string
	sources []string
}

func newLine(seed uint64) *line { return &line{rng: rand.New(rand.NewPCG(seed, 7))} }

// code gives the code of name, new ones at the end.
func code(list *[]string, name string) int32 {
	if i := slices.Index(*list, name); i >= 0 {
		return int32(i)
	}
	*list = append(*list, name)
	return int32(len(*list) - 1)
}

// table makes n rows whose labels are drawn by label; an empty name is no label.
func (l *line) table(n int, label func(i int) string) (*model.Table, int64) {
	t := &model.Table{
		Columns: []model.Column{
			{Name: "diameter_mm", Kind: model.Number, Size: 1},
			{Name: "cultivar", Kind: model.Category, Size: 1},
			{Name: "spectrum", Kind: model.Vector, Size: 2},
		},
		Sources: make([]int32, 0, n),
	}
	for i := range n {
		t.Columns[0].Values = append(t.Columns[0].Values, l.rng.NormFloat64())
		level := int32(-1)
		if k := l.rng.IntN(5); k > 0 {
			level = code(&l.levels, fmt.Sprintf("cultivar-%d", k))
		}
		t.Columns[1].Codes = append(t.Columns[1].Codes, level)
		t.Columns[2].Values = append(t.Columns[2].Values, l.rng.Float64(), l.rng.Float64())
		observed := int32(-1)
		if name := label(i); name != "" {
			observed = code(&l.classes, name)
		}
		t.Labels = append(t.Labels, observed)
		t.Sources = append(t.Sources, code(&l.sources, fmt.Sprintf("grader-%d", l.rng.IntN(3))))
		t.Keys = append(t.Keys, model.Key(l.row+int64(i)))
	}
	t.Columns[1].Levels, t.Classes, t.SourceNames = l.levels, l.classes, l.sources
	first := l.row
	l.row += int64(n)
	return t, first
}

// restart forgets the order in which names were met, as another run would.
func (l *line) restart() { l.classes, l.levels, l.sources = nil, nil, nil }

// naiveRow is a row written out with its names.
type naiveRow struct {
	row  int64
	time int64
	key  uint64
	text string
	name string // of the class
}

// rowsOf writes the rows of a table out.
func rowsOf(t *model.Table, numbers func(i int) int64) []naiveRow {
	var list []naiveRow
	for i := range t.Labels {
		if t.Labels[i] < 0 {
			continue
		}
		level := "-"
		if c := t.Columns[1].Codes[i]; c >= 0 {
			level = t.Columns[1].Levels[c]
		}
		list = append(list, naiveRow{row: numbers(i), key: t.Keys[i], name: t.Classes[t.Labels[i]], text: fmt.Sprint(
			t.Columns[0].Values[i], level, t.Columns[2].Values[2*i:2*i+2], t.SourceNames[t.Sources[i]])})
	}
	return list
}

// naive is the window as a plain slice of everything that came.
type naive struct {
	p     Policy
	rows  []naiveRow
	times []int64
	now   int64
	late  int64
	names map[string]bool
}

func (n *naive) append(t *model.Table, first int64, times []int64) {
	at := 0
	list := rowsOf(t, func(i int) int64 { return first + int64(i) })
	for i := range t.Labels {
		if t.Labels[i] < 0 {
			continue
		}
		r := list[at]
		at++
		r.time = unknown
		if times != nil && n.p.Span != NoSpan {
			r.time = n.tick(times[i])
		}
		if n.p.Span != NoSpan && n.now != unknown && n.gone(r.time) {
			n.late++
			continue
		}
		n.names[r.name] = true
		n.rows = append(n.rows, r)
	}
}

// tick lets time pass and gives the time that a row of time t counts with.
func (n *naive) tick(t int64) int64 {
	if t != unknown {
		n.times = append(n.times, t)
		last := slices.Clone(n.times[max(0, len(n.times)-64):])
		slices.Sort(last)
		if len(last) >= 8 && last[len(last)-8] > n.now {
			before := n.now
			n.now = last[len(last)-8]
			for i := range n.rows {
				if before == unknown {
					n.rows[i].time = n.believed(n.rows[i].time)
				}
			}
		}
	}
	return n.believed(t)
}

func (n *naive) believed(t int64) int64 {
	if n.now != unknown && (t == unknown || t > n.now+int64(n.p.Span)) {
		return n.now
	}
	return t
}

func (n *naive) gone(t int64) bool { return t <= n.now-int64(n.p.Span) }

// view picks the rows that a window with this limit must show.
func (n *naive) view(limit int) []naiveRow {
	var live []naiveRow
	for _, r := range n.rows {
		if n.p.Span == NoSpan || n.now == unknown || !n.gone(r.time) {
			live = append(live, r)
		}
	}
	if n.p.Keep == Latest {
		return live[max(0, len(live)-limit):]
	}
	if len(live) <= limit {
		return live
	}
	sort.Slice(live, func(i, j int) bool {
		return priority(n.p.Seed, live[i].key) > priority(n.p.Seed, live[j].key)
	})
	floor := min(n.p.Floor, limit/(2*len(n.names)))
	var first, rest []naiveRow
	count := map[string]int{}
	for _, r := range live {
		if count[r.name]++; count[r.name] <= floor {
			first = append(first, r)
		} else {
			rest = append(rest, r)
		}
	}
	out := append(first, rest[:limit-len(first)]...)
	sort.Slice(out, func(i, j int) bool { return out[i].row < out[j].row })
	return out
}

const minute = int64(time.Minute)
