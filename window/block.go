package window

import "labelweir/model"

// block holds up to a fixed count of rows, column by column. len(rows) is how many there are.
type block struct {
	columns []model.Column
	rows    []int64  // row numbers
	times   []int64  // nanoseconds since 1970, or unknown
	keys    []uint64 // hash of the position
	labels  []int32
	sources []int32
	values  [][]float64 // by column; nil for Category
	codes   [][]int32   // by column; nil for others
}

// newBlock makes a block for n rows of the columns.
func newBlock(columns []model.Column, n int) *block {
	b := &block{
		columns: columns,
		rows:    make([]int64, 0, n), times: make([]int64, 0, n), keys: make([]uint64, 0, n),
		labels: make([]int32, 0, n), sources: make([]int32, 0, n),
		values: make([][]float64, len(columns)), codes: make([][]int32, len(columns)),
	}
	for i := range columns {
		if c := &columns[i]; c.Kind == model.Category {
			b.codes[i] = make([]int32, 0, n)
		} else {
			b.values[i] = make([]float64, 0, n*c.Size)
		}
	}
	return b
}

// rowBytes is what one row takes in a block.
func rowBytes(columns []model.Column) int64 {
	n := int64(8 + 8 + 8 + 4 + 4)
	for i := range columns {
		if c := &columns[i]; c.Kind == model.Category {
			n += 4
		} else {
			n += 8 * int64(c.Size)
		}
	}
	return n
}

// stretch sets the number of rows to n, which is at most what the block was made for.
func (b *block) stretch(n int) {
	b.rows, b.times, b.keys, b.labels, b.sources = b.rows[:n], b.times[:n], b.keys[:n], b.labels[:n], b.sources[:n]
	for i := range b.columns {
		if b.codes[i] != nil {
			b.codes[i] = b.codes[i][:n]
		} else {
			b.values[i] = b.values[i][:n*b.columns[i].Size]
		}
	}
}

// move copies row j of from to row i of b, both of which exist.
func (b *block) move(i int, from *block, j int) {
	b.rows[i], b.times[i], b.keys[i] = from.rows[j], from.times[j], from.keys[j]
	b.labels[i], b.sources[i] = from.labels[j], from.sources[j]
	for c := range b.columns {
		if b.codes[c] != nil {
			b.codes[c][i] = from.codes[c][j]
			continue
		}
		s := b.columns[c].Size
		copy(b.values[c][i*s:i*s+s], from.values[c][j*s:j*s+s])
	}
}
