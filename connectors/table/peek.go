package table

import (
	"io"

	"github.com/apache/arrow/go/v16/arrow"
)

// habit is what the first rows show of one column.
type habit struct {
	rows     int
	valid    int  // rows that are not null
	distinct int  // names among them; 0 for columns without names
	counting bool // each value is the one before plus 1, without nulls
	text     bool // all values are UTF-8

	names *coder
	last  float64
}

// peek opens the input once more and reads its first rows, as many as asked for. The answer depends on the rows alone,
// not on how they are cut into record batches.
func peek(opened *input, opt Options) (habits []habit, err error) {
	if opt.Unreadable != nil {
		opt.Unreadable = func(Unreadable) error { return nil } // they are passed on when all rows are read
	}
	in, err := openInput(opened.files, opened.text, opened.schema, opt)
	if err != nil {
		return nil, err
	}
	defer in.close()
	defer func() {
		if p := recover(); p != nil {
			habits, err = nil, in.damaged("its values can't be read", Caught(p))
		}
	}()
	habits = make([]habit, in.schema.NumFields())
	for i := range habits {
		habits[i] = habit{counting: true, text: true, names: newCoder()}
	}
	for left := opt.Peek; left > 0; {
		rec, err := in.next()
		if err == io.EOF {
			break
		}
		if err != nil {
			return nil, err
		}
		part := rec.NewSlice(0, min(int64(left), rec.NumRows()))
		left -= int(part.NumRows())
		for i := range habits {
			habits[i].watch(part.Column(i))
		}
		part.Release()
		rec.Release()
	}
	return habits, nil
}

// watch takes in the next rows of the column.
func (h *habit) watch(arr arrow.Array) {
	h.rows += arr.Len()
	h.valid += arr.Len() - arr.NullN()
	if arr.DataType().ID() == arrow.NULL {
		h.valid = 0
	}
	h.watchNames(arr)
	if h.counting = h.counting && arrow.IsInteger(meant(arr.DataType()).ID()) && arr.NullN() == 0; !h.counting {
		return
	}
	vals, _ := appendNumbers(nil, arr)
	for i, v := range vals {
		if h.rows-arr.Len()+i > 0 && v != h.last+1 {
			h.counting = false
			return
		}
		h.last = v
	}
}

// watchNames counts the distinct values of integers and text.
func (h *habit) watchNames(arr arrow.Array) {
	dt := meant(arr.DataType())
	if d, ok := dt.(*arrow.DictionaryType); ok {
		dt = plain(d.ValueType)
	}
	if !isText(dt) && !arrow.IsInteger(dt.ID()) {
		return
	}
	if _, _, err := h.names.append(nil, arr); err != nil {
		h.text = false
	}
	h.distinct = len(h.names.names)
}

// allDistinct tells whether at least the given share of the values differ, with enough values to tell.
func (h *habit) allDistinct(share float64, least int) bool {
	return h.valid >= least && float64(h.distinct) >= share*float64(h.valid)
}
