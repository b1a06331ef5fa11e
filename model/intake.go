package model

import (
	"cmp"
	"fmt"
	"math"
	"slices"

	"labelweir/model/internal/encode"
	"labelweir/model/internal/learn"
)

// intake is a table made ready for learning: usable rows only, classes and sources in the order of their names.
type intake struct {
	rows    []int32 // table rows that are used
	reason  []Reason
	classes []string
	counts  []int // rows of each class
	sources []string
	fields  []field
	encoder *encode.Encoder
	data    *learn.Data
	fold    []uint8 // of each used row
}

// field is what a snapshot remembers of a column.
type field struct {
	Name string
	Kind Kind
	Size int // 0 for a category
}

func (c *Column) field() field {
	f := field{Name: c.Name, Kind: c.Kind, Size: c.Size}
	if c.Kind == Category {
		f.Size = 0
	}
	return f
}

// newIntake checks t and picks its usable rows. Nothing is encoded yet.
func newIntake(t *Table) (*intake, error) {
	if err := t.check(); err != nil {
		return nil, err
	}
	in := &intake{reason: make([]Reason, t.Rows())}
	class := in.pickClasses(t)
	for i, l := range t.Labels {
		switch {
		case l < 0:
			in.reason[i] = NoLabel
		case class[l] < 0:
			in.reason[i] = NewClass
		case !finite(t, i):
			in.reason[i] = NotFinite
		default:
			in.rows = append(in.rows, int32(i))
		}
	}
	if len(in.rows) < MinRows {
		return nil, fmt.Errorf("%w: %d usable rows, %d are needed", ErrTooFew, len(in.rows), MinRows)
	}
	if len(in.classes) < 2 {
		return nil, fmt.Errorf("%w: %d classes have at least %d rows each", ErrOneClass, len(in.classes), MinClassRows)
	}
	for k := range t.Columns {
		c := &t.Columns[k]
		in.fields = append(in.fields, c.field())
	}
	in.data.Keys = make([]uint64, len(in.rows))
	in.data.Labels = make([]int32, len(in.rows))
	in.counts = make([]int, len(in.classes))
	for i, r := range in.rows {
		c := class[t.Labels[r]]
		in.data.Labels[i] = c
		in.counts[c]++
		in.data.Keys[i] = t.Keys[r]
	}
	in.pickSources(t)
	return in, nil
}

// smallRows: windows with fewer rows are cut into twice as many folds, since every row counts there.
const smallRows = 1500

// deal puts every used row into a fold by its key.
func (in *intake) deal(folds int) {
	in.fold = make([]uint8, len(in.rows))
	for i, k := range in.data.Keys {
		in.fold[i] = uint8(k % uint64(folds))
	}
}

// pickClasses lists the classes with enough rows by name and maps table codes to them, −1 for the others.
func (in *intake) pickClasses(t *Table) []int32 {
	n := make([]int, len(t.Classes))
	for i, l := range t.Labels {
		if l >= 0 && finite(t, i) {
			n[l]++
		}
	}
	order := sortedNames(t.Classes, func(c int) bool { return n[c] >= MinClassRows })
	to := slices.Repeat([]int32{-1}, len(t.Classes))
	for i, c := range order {
		to[c] = int32(i)
		in.classes = append(in.classes, t.Classes[c])
	}
	in.data = &learn.Data{Classes: len(order)}
	return to
}

// pickSources lists the sources met in the used rows by name.
func (in *intake) pickSources(t *Table) {
	if t.Sources == nil {
		return
	}
	n := make([]int, len(t.SourceNames))
	for _, r := range in.rows {
		if s := t.Sources[r]; s >= 0 {
			n[s]++
		}
	}
	to := slices.Repeat([]int32{-1}, len(t.SourceNames))
	for i, c := range sortedNames(t.SourceNames, func(c int) bool { return n[c] > 0 }) {
		to[c] = int32(i)
		in.sources = append(in.sources, t.SourceNames[c])
	}
	if len(in.sources) == 0 {
		return
	}
	in.data.Sources = len(in.sources)
	in.data.Source = make([]int32, len(in.rows))
	for i, r := range in.rows {
		in.data.Source[i] = -1
		if s := t.Sources[r]; s >= 0 {
			in.data.Source[i] = to[s]
		}
	}
}

// sortedNames gives the indexes of the names that are wanted, ordered by name.
func sortedNames(names []string, want func(int) bool) []int {
	var order []int
	for c := range names {
		if want(c) {
			order = append(order, c)
		}
	}
	slices.SortFunc(order, func(a, b int) int { return cmp.Compare(names[a], names[b]) })
	return order
}

// finite tells whether no number of row i is infinite. Missing values (NaN) are allowed.
func finite(t *Table, i int) bool {
	for k := range t.Columns {
		if !t.Columns[k].finite(i) {
			return false
		}
	}
	return true
}

func (c *Column) finite(i int) bool {
	if c.Kind == Category {
		return true
	}
	for _, v := range c.Values[i*c.Size : (i+1)*c.Size] {
		if math.IsInf(v, 0) {
			return false
		}
	}
	return true
}
