// Package encode turns table columns into the two forms the learners read: a dense row of numbers on a common scale,
// and small whole-number bins for trees. An encoder is fitted on a window and immutable after.
package encode

// Input is one column as the encoder sees it.
type Input struct {
	Size   int       // numbers a row; 0 for a category
	Values []float64 // n·Size, row after row; NaN is missing
	Codes  []int32   // n category codes, −1 missing
	Levels []string  // name of each code; read by Fit
	Slots  []int32   // slot of each code, from Part.Bind; read by Block
}

// Limits that bound an encoder's size.
const (
	maxBins   = 64   // bins of a number
	maxKnots  = 1024 // knots of a number's rank transform
	maxLevels = 64   // levels of a category that get a column of their own, the most frequent first
	clipRank  = 1e-3 // smallest mid-rank before the normal quantile
	minLevel  = 3    // fewest rows of such a level
)

// Encoder maps rows to Dense float32 values (the last is the constant 1) and Bins bytes.
type Encoder struct {
	Parts []Part // one a table column, in order
	Dense int    // values a dense row has, the constant included
	Bins  int    // bytes a binned row has
}

// Part encodes one table column.
type Part struct {
	Numbers []Number // one for each number of a row; nil for a category
	Levels  []string // category: the levels with a column of their own
}

// Fit fits an encoder on the listed rows. The order of a category's codes does not matter, only its names do. Cost
// O(n log n) a number.
func Fit(cols []Input, rows []int32) *Encoder {
	e := &Encoder{Parts: make([]Part, len(cols))}
	for i := range cols {
		p, c := &e.Parts[i], &cols[i]
		if c.Size == 0 {
			p.Levels = frequent(c, rows)
			continue
		}
		p.Numbers = make([]Number, c.Size)
		for j := range p.Numbers {
			p.Numbers[j].fit(c.Values, j, c.Size, rows)
		}
	}
	e.prepare()
	return e
}

// prepare derives from Parts what is not saved.
func (e *Encoder) prepare() {
	e.Bins = 0
	for i := range e.Parts {
		p := &e.Parts[i]
		e.Bins += p.Width()
		for j := range p.Numbers {
			p.Numbers[j].find = newLookup(&p.Numbers[j])
		}
	}
	e.Dense = e.Bins + 1
}

// Width is the number of values, and of bins, that p makes of a row.
func (p *Part) Width() int {
	if p.Numbers == nil {
		return len(p.Levels) + 2 // rare, missing
	}
	w := len(p.Numbers)
	for i := range p.Numbers {
		if p.Numbers[i].Missing {
			w++
		}
	}
	return w
}
