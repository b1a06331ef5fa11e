package encode

import (
	"fmt"
	"math"
	"slices"
	"strings"
	"testing"
)

// apples has a number with gaps, a category and a vector. Elstar and Gala stand there four times, Topaz three times,
// Idared once, and one row has no cultivar.
func apples() []Input {
	nan := math.NaN()
	return []Input{
		{Size: 1, Values: []float64{150, 160, nan, 170, 180, 190, 200, 210, nan, 220, 230, 240, 250}},
		{Codes: []int32{0, 1, 2, 0, 1, 2, 0, 1, 2, 3, 1, 0, -1}, Levels: []string{"Elstar", "Gala", "Topaz", "Idared", "never"}},
		{Size: 2, Values: []float64{1, 5, 2, 5, 3, 5, 4, 5, 5, 5, 6, 5, 7, 5, 8, 5, 9, 5, 10, 5, 11, 5, 12, 5, 13, 5}},
	}
}

func encoded(e *Encoder, cols []Input, rows []int32) (dense []float32, bins []uint8) {
	for k := range cols {
		cols[k].Slots = e.Parts[k].Bind(nil, cols[k].Levels)
	}
	dense, bins = make([]float32, len(rows)*e.Dense), make([]uint8, len(rows)*e.Bins)
	e.Block(cols, rows, dense, bins)
	return dense, bins
}

func TestLayoutOfARow(t *testing.T) {
	cols := apples()
	e := Fit(cols, all(13))
	// number, its absence; three levels, rare, missing; two of the vector; the constant.
	if e.Bins != 9 || e.Dense != 10 {
		t.Fatalf("%d bins, %d dense", e.Bins, e.Dense)
	}
	if got := e.Parts[1].Levels; !slices.Equal(got, []string{"Elstar", "Gala", "Topaz"}) {
		t.Errorf("levels %q", got)
	}
	dense, bins := encoded(e, cols, all(13))
	for row, want := range map[int]string{
		2:  "1 00100",
		8:  "1 00100",
		9:  "0 00010",
		12: "0 00001",
	} {
		b := bins[row*9 : row*9+9]
		if got := fmt.Sprintf("%d %d%d%d%d%d", b[1], b[2], b[3], b[4], b[5], b[6]); got != want {
			t.Errorf("row %d has marks %s, wanted %s", row, got, want)
		}
	}
	part := float32(1 / math.Sqrt(3))
	for row := range 13 {
		x := dense[row*10 : row*10+10]
		if x[9] != 1 || x[8] != 0 {
			t.Errorf("row %d: constant %v, column that never varies %v", row, x[9], x[8])
		}
		for i := 2; i < 7; i++ {
			if want := part * float32(bins[row*9+i]); math.Abs(float64(x[i]-want)) > 1e-6 {
				t.Errorf("row %d, slot %d: %v, wanted %v", row, i, x[i], want)
			}
		}
	}
	// The median of the numbers stands for a missing one.
	if dense[2*10] != dense[6*10] || e.Parts[0].Numbers[0].Filler != 200 {
		t.Errorf("missing becomes %v, the median %v becomes %v", dense[20], e.Parts[0].Numbers[0].Filler, dense[60])
	}
}

func TestOrderOfCodesDoesNotMatter(t *testing.T) {
	cols, turned := apples(), apples()
	c := &turned[1]
	slices.Reverse(c.Levels)
	for i, v := range c.Codes {
		if v >= 0 {
			c.Codes[i] = 4 - v
		}
	}
	rows := []int32{12, 3, 5, 4, 9}
	dense, bins := encoded(Fit(cols, all(13)), cols, rows)
	dense2, bins2 := encoded(Fit(turned, all(13)), turned, rows)
	if !slices.Equal(dense, dense2) || !slices.Equal(bins, bins2) {
		t.Error("rows are encoded otherwise")
	}
}

func TestOnlyTheListedRowsAreFitted(t *testing.T) {
	cols := apples()
	e := Fit(cols, []int32{0, 1, 3, 4, 5, 6})
	if e.Parts[0].Numbers[0].Missing || e.Parts[0].Numbers[0].Filler != 180 {
		t.Errorf("%+v", e.Parts[0].Numbers[0])
	}
	// A value missing only later is the median, without a mark.
	dense, _ := encoded(e, cols, []int32{2, 4})
	if dense[0] != dense[e.Dense] {
		t.Errorf("missing becomes %v, the median %v", dense[0], dense[e.Dense])
	}
}

func TestOnlyFrequentLevelsHaveAColumn(t *testing.T) {
	c := Input{}
	for l := range 200 {
		c.Levels = append(c.Levels, fmt.Sprintf("crate %03d", l))
		for range 1 + l%100 {
			c.Codes = append(c.Codes, int32(l))
		}
	}
	e := Fit([]Input{c}, all(len(c.Codes)))
	p := &e.Parts[0]
	if len(p.Levels) != maxLevels || p.Levels[0] != "crate 099" || p.Levels[1] != "crate 199" || p.Levels[63] != "crate 168" {
		t.Errorf("%d levels: %q", len(p.Levels), p.Levels)
	}
	slots := p.Bind(nil, c.Levels[:100])
	slots = p.Bind(slots, append(c.Levels, "crate 999"))
	if len(slots) != 201 || slots[99] != 0 || slots[199] != 1 || slots[0] != maxLevels || slots[200] != maxLevels {
		t.Errorf("slots %v", slots)
	}
}

func TestBlockAllocatesNothing(t *testing.T) {
	cols := apples()
	e := Fit(cols, all(13))
	dense, bins := encoded(e, cols, all(13))
	rows := all(13)
	if n := testing.AllocsPerRun(100, func() { e.Block(cols, rows, dense, bins) }); n != 0 {
		t.Errorf("%v allocations", n)
	}
	e.Block(cols, nil, nil, nil) // nothing to do
}

func TestCheckRefusesWhatBlockCannotRun(t *testing.T) {
	for name, c := range map[string]struct {
		change func(*Encoder)
		says   string
	}{
		"knots":  {func(e *Encoder) { k := e.Parts[0].Numbers[0].Knots; k[1] = k[0] }, "do not rise"},
		"edges":  {func(e *Encoder) { k := e.Parts[0].Numbers[0].Edges; slices.Reverse(k) }, "do not rise"},
		"normal": {func(e *Encoder) { e.Parts[0].Numbers[0].Normal = nil }, "knots"},
		"many":   {func(e *Encoder) { e.Parts[2].Numbers[0].Edges = make([]float64, maxBins) }, "64 edges"},
		"levels": {func(e *Encoder) { e.Parts[1].Levels[1] = "Topaz" }, "a level stands there twice"},
	} {
		e := Fit(apples(), all(13))
		if err := e.Check(); err != nil {
			t.Fatal(err)
		}
		c.change(e)
		if err := e.Check(); err == nil || !strings.Contains(err.Error(), c.says) {
			t.Errorf("%s: %v; wanted it to say %q", name, err, c.says)
		}
	}
}
