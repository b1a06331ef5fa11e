package model

import "fmt"

// Kind says how the values of a field are to be read.
type Kind uint8

// The kinds of field.
const (
	Number   Kind = iota + 1 // one real number a row
	Category                 // one of a list of levels a row
	Vector                   // a fixed count of real numbers a row
)

// String gives the kind's name as it stands in a configuration.
func (k Kind) String() string {
	switch k {
	case Number:
		return "number"
	case Category:
		return "category"
	case Vector:
		return "vector"
	}
	return fmt.Sprintf("kind(%d)", uint8(k))
}

// Column holds one field's values for all rows of a table.
//
// Levels grows only at its end while a run lasts, so a code once given keeps its meaning in later tables of the run.
type Column struct {
	Name   string
	Kind   Kind
	Size   int       // numbers a row: 1, for Vector its fixed size
	Values []float64 // Number, Vector: n·Size values, row after row; NaN is a missing value
	Codes  []int32   // Category: n indexes into Levels; −1 is a missing value
	Levels []string  // Category: level names in the order of their first appearance
}

// Table is a set of labelled rows, column by column. All slices have one entry a row, except Classes and SourceNames,
// which, like a column's Levels, only ever grow at their end during a run.
type Table struct {
	Columns     []Column
	Labels      []int32  // index into Classes of the observed label; −1: none
	Sources     []int32  // index into SourceNames; −1: none; nil: the input has no source
	Keys        []uint64 // hash of the row's position: decides its fold for life and breaks ties
	Classes     []string
	SourceNames []string
}

// Rows is the number of rows.
func (t *Table) Rows() int { return len(t.Labels) }

// Key hashes a row number to the key that stands in [Table.Keys]: one step of SplitMix64 (Steele, Lea & Flood 2014).
func Key(row int64) uint64 {
	z := uint64(row)*0x9e3779b97f4a7c15 + 0x9e3779b97f4a7c15
	z = (z ^ z>>30) * 0xbf58476d1ce4e5b9
	z = (z ^ z>>27) * 0x94d049bb133111eb
	return z ^ z>>31
}

// check tells whether every slice of the table has one entry a row, every code stands for a name, and names are distinct.
func (t *Table) check() error {
	n := t.Rows()
	if len(t.Keys) != n || (t.Sources != nil && len(t.Sources) != n) {
		return fmt.Errorf("%w: %d labels, %d keys, %d sources", ErrTable, n, len(t.Keys), len(t.Sources))
	}
	if err := checkCodes("class", t.Labels, t.Classes); err != nil {
		return err
	}
	if err := checkCodes("source", t.Sources, t.SourceNames); err != nil {
		return err
	}
	names := make(map[string]bool, len(t.Columns))
	for i := range t.Columns {
		c := &t.Columns[i]
		if err := c.check(n); err != nil {
			return err
		}
		if names[c.Name] {
			return fmt.Errorf("%w: two columns %q", ErrTable, c.Name)
		}
		names[c.Name] = true
	}
	return nil
}

func (c *Column) check(n int) error {
	switch c.Kind {
	case Number, Vector:
		if c.Size < 1 || len(c.Values) != n*c.Size {
			return fmt.Errorf("%w: column %q has %d values for %d rows of %d", ErrTable, c.Name, len(c.Values), n, c.Size)
		}
		return nil
	case Category:
		if len(c.Codes) != n {
			return fmt.Errorf("%w: column %q has %d codes for %d rows", ErrTable, c.Name, len(c.Codes), n)
		}
		return checkCodes(fmt.Sprintf("level of column %q", c.Name), c.Codes, c.Levels)
	}
	return fmt.Errorf("%w: column %q has %v", ErrTable, c.Name, c.Kind)
}

// checkCodes tells whether all codes are indexes into names, or negative, and names are distinct.
func checkCodes(what string, codes []int32, names []string) error {
	for i, c := range codes {
		if int(c) >= len(names) {
			return fmt.Errorf("%w: row %d has %s %d of %d", ErrTable, i, what, c, len(names))
		}
	}
	seen := make(map[string]bool, len(names))
	for _, s := range names {
		if seen[s] {
			return fmt.Errorf("%w: %s %q stands there twice", ErrTable, what, s)
		}
		seen[s] = true
	}
	return nil
}
