package panel

import (
	"fmt"
	"math"
	"os"
	"strings"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
	"github.com/apache/arrow/go/v16/arrow/ipc"
)

// column holds one file column in the one slice that its type calls for.
type column struct {
	name    string
	numbers []float64 // numbers; NaN is null
	flags   []bool    // booleans; null is false
	codes   []int32   // text and dictionaries: indexes into levels, −1 is null
	levels  []string  // in the order of their first appearance
	index   map[string]int32
}

// readColumns reads a whole Arrow IPC file, column by column.
func readColumns(path string) ([]column, error) {
	f, err := os.Open(path)
	if err != nil {
		return nil, err
	}
	defer f.Close()
	r, err := ipc.NewFileReader(f)
	if err != nil {
		return nil, fmt.Errorf("%s: %w", path, err)
	}
	defer r.Close()
	cols := make([]column, r.Schema().NumFields())
	for j, field := range r.Schema().Fields() {
		cols[j] = column{name: field.Name, index: map[string]int32{}}
	}
	for b := range r.NumRecords() {
		rec, err := r.RecordAt(b)
		if err != nil {
			return nil, fmt.Errorf("%s: batch %d: %w", path, b, err)
		}
		for j := range cols {
			if err := cols[j].add(rec.Column(j)); err != nil {
				return nil, fmt.Errorf("%s: batch %d: column %q: %w", path, b, cols[j].name, err)
			}
		}
		rec.Release()
	}
	return cols, nil
}

// add appends the values of one batch.
func (c *column) add(a arrow.Array) error {
	switch a := a.(type) {
	case *array.Float32:
		c.addNumbers(a, func(i int) float64 { return float64(a.Value(i)) })
	case *array.Float64:
		c.addNumbers(a, a.Value)
	case *array.Int64:
		c.addNumbers(a, func(i int) float64 { return float64(a.Value(i)) })
	case *array.Boolean:
		for i := range a.Len() {
			c.flags = append(c.flags, a.IsValid(i) && a.Value(i))
		}
	case *array.String:
		c.addTexts(a, a.Value)
	case *array.Dictionary:
		texts, ok := a.Dictionary().(*array.String)
		if !ok {
			return fmt.Errorf("dictionary of %v cannot be read; only of text", a.Dictionary().DataType())
		}
		c.addTexts(a, func(i int) string { return texts.Value(a.GetValueIndex(i)) })
	default:
		return fmt.Errorf("type %v cannot be read", a.DataType())
	}
	return nil
}

func (c *column) addNumbers(a arrow.Array, value func(int) float64) {
	for i := range a.Len() {
		v := math.NaN()
		if a.IsValid(i) {
			v = value(i)
		}
		c.numbers = append(c.numbers, v)
	}
}

func (c *column) addTexts(a arrow.Array, value func(int) string) {
	for i := range a.Len() {
		code := int32(-1)
		if a.IsValid(i) {
			code = c.code(value(i))
		}
		c.codes = append(c.codes, code)
	}
}

// code gives the index of a level, adding it when it is new.
func (c *column) code(level string) int32 {
	code, ok := c.index[level]
	if !ok {
		code = int32(len(c.levels))
		level = strings.Clone(level) // the batch's memory goes away
		c.levels = append(c.levels, level)
		c.index[level] = code
	}
	return code
}
