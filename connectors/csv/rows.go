package csv

import (
	"bytes"
	"fmt"

	"labelweir/connectors/csv/internal/cut"
	"labelweir/connectors/internal/feed"
	"labelweir/connectors/internal/textrows"
	"labelweir/connectors/table"
)

// rows gives one row of the file after the other.
type rows struct {
	textrows.Cursor
	delimiter byte
	columns   int // cells that each row must have; 0: any number

	row   cut.Row
	whole []byte // the row, its end included; valid until the next call
}

func newRows(f table.File, delimiter byte, mostRow int) *rows {
	return &rows{Cursor: textrows.NewCursor(f, mostRow), delimiter: delimiter}
}

// mostColumns is the most columns of a file: a bound for what one row can make us allocate.
const mostColumns = 1 << 16

// Next goes to the next row that is no blank line; false at the end of the file.
func (r *rows) Next() (bool, error) {
	for {
		if err := r.Step(); err != nil {
			return false, err
		}
		if ok, err := r.cut(); !ok || err != nil {
			return false, err
		}
		if len(r.Row) > 0 || r.Reason != "" {
			return true, nil
		}
	}
}

// cut cuts the row at the window's front, reading on until it is whole, and sets the reason.
func (r *rows) cut() (bool, error) {
	most := r.columns
	if most == 0 {
		most = mostColumns
	}
	for {
		if w := r.Feed.Window(); len(w) > 0 && r.row.Cut(w, r.delimiter, most, r.Feed.Ended()) {
			r.take(r.row.Text, r.row.Next, r.row.Lines)
			r.judge()
			return true, nil
		}
		if r.Feed.Ended() {
			return false, nil
		}
		switch err := r.More(); {
		case err == feed.ErrTooLong:
			r.tooLong()
			return true, nil
		case err != nil:
			return false, err
		}
	}
}

// take makes the window's front the row.
func (r *rows) take(text, next, lines int) {
	r.whole = r.Feed.Window()[:next]
	r.Row, r.Skip = r.whole[:text], next
	r.Beyond += int64(lines)
}

// judge sets the reason.
func (r *rows) judge() {
	switch {
	case r.row.Fault == cut.Open:
		r.Reason = fmt.Sprintf("cell %d opens a quote that is never closed", r.row.Column+1)
	case r.row.Fault == cut.AfterQuote:
		r.Reason = fmt.Sprintf("cell %d has text behind its closing quote", r.row.Column+1)
	case r.row.Text > 0 && r.columns > 0 && r.row.Count != r.columns:
		r.Reason = fmt.Sprintf("has %s, the header has %d", cells(r.row.Count), r.columns)
	}
}

// tooLong takes the first line of a window that holds no whole row, or all of it when it holds no whole line either.
func (r *rows) tooLong() {
	w := r.Feed.Window()
	if i := bytes.IndexByte(w, '\n'); i >= 0 {
		r.take(i, i+1, 1)
		r.Reason = fmt.Sprintf("opens a quote that is not closed within %d bytes", len(w))
		return
	}
	r.CutOff()
	r.whole = r.Row
	r.Beyond++
}

func cells(n int) string {
	if n == 1 {
		return "1 cell"
	}
	return fmt.Sprintf("%d cells", n)
}

// cell is the text of cell i of the row, without quotes around it.
func (r *rows) cell(i int) []byte {
	c := r.row.Cells[i]
	return r.whole[c.Lo:c.Hi]
}

// undouble appends b to dst with every two quotes made one.
func undouble(dst, b []byte) []byte {
	for i := 0; i < len(b); i++ {
		dst = append(dst, b[i])
		if b[i] == '"' {
			i++
		}
	}
	return dst
}
