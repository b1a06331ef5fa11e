package csv

import (
	"bytes"
	"fmt"

	"labelweir/connectors/csv/internal/cut"
	"labelweir/connectors/internal/feed"
	"labelweir/connectors/table"
)

// rows gives one row of the file after the other.
type rows struct {
	path      string
	feed      *feed.Feed
	delimiter byte
	columns   int // cells that each row must have; 0: any number

	row    cut.Row
	text   []byte // the row, its end included; valid until the next call
	at     int64  // where it begins
	line   int64  // where it begins, counted from 1
	beyond int64  // line of the next row
	reason string // why the row can't be read, "" when it can
	skip   int    // bytes to be taken off the window before the next row
	long   bool   // and then all up to the next line
}

func newRows(f table.File, delimiter byte, mostRow int) *rows {
	return &rows{path: f.Path, feed: feed.New(f, f.Size, mostRow), delimiter: delimiter, beyond: 1}
}

// mostColumns is the most columns of a file: a bound for what one row can make us allocate.
const mostColumns = 1 << 16

// next goes to the next row that is no blank line; false at the end of the file.
func (r *rows) next() (bool, error) {
	for {
		if err := r.pass(); err != nil {
			return false, err
		}
		r.at, r.line = r.feed.Offset(), r.beyond
		ok, err := r.cut()
		if !ok || err != nil {
			return false, err
		}
		r.text, r.skip = r.feed.Window()[:r.row.Next], r.row.Next
		r.beyond += int64(r.row.Lines)
		if r.row.Text > 0 || r.reason != "" {
			return true, nil
		}
	}
}

// pass leaves the row behind.
func (r *rows) pass() error {
	r.feed.Skip(r.skip)
	for r.skip = 0; r.long; {
		w := r.feed.Window()
		if i := bytes.IndexByte(w, '\n'); i >= 0 {
			r.feed.Skip(i + 1)
			r.long = false
		} else if r.feed.Skip(len(w)); r.feed.Ended() {
			r.long = false
		} else if err := r.feed.More(); err != nil {
			return r.fault("can't be read", "", err)
		}
	}
	return nil
}

// cut cuts the row at the window's front, reading on until it is whole, and sets the reason.
func (r *rows) cut() (bool, error) {
	most := r.columns
	if most == 0 {
		most = mostColumns
	}
	for {
		if w := r.feed.Window(); len(w) > 0 && r.row.Cut(w, r.delimiter, most, r.feed.Ended()) {
			r.judge()
			return true, nil
		}
		if r.feed.Ended() {
			return false, nil
		}
		switch err := r.feed.More(); {
		case err == feed.ErrTooLong:
			r.tooLong()
			return true, nil
		case err != nil:
			return false, r.fault("can't be read", "", err)
		}
	}
}

// judge sets the reason.
func (r *rows) judge() {
	r.reason = ""
	switch {
	case r.row.Fault == cut.Open:
		r.reason = fmt.Sprintf("cell %d opens a quote that is never closed", r.row.Column+1)
	case r.row.Fault == cut.AfterQuote:
		r.reason = fmt.Sprintf("cell %d has text behind its closing quote", r.row.Column+1)
	case r.row.Text > 0 && r.columns > 0 && r.row.Count != r.columns:
		r.reason = fmt.Sprintf("has %s, the header has %d", cells(r.row.Count), r.columns)
	}
}

// tooLong takes the first line of a window that holds no whole row, or all of it when it holds no whole line either.
func (r *rows) tooLong() {
	w := r.feed.Window()
	r.row.Lines = 1
	if i := bytes.IndexByte(w, '\n'); i >= 0 {
		r.row.Text, r.row.Next = i, i+1
		r.reason = fmt.Sprintf("opens a quote that is not closed within %d bytes", len(w))
		return
	}
	r.row.Text, r.row.Next, r.long = len(w), len(w), true
	r.reason = fmt.Sprintf("has more than %d bytes; the rest of the line is left out", len(w))
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
	return r.text[c.Lo:c.Hi]
}

// unreadable is the row as one that can't be read.
func (r *rows) unreadable() table.Unreadable {
	return table.Unreadable{File: r.path, Line: r.line, Byte: r.at, Bytes: r.text[:r.row.Text], Reason: r.reason}
}

// fault is an error at the row.
func (r *rows) fault(what, do string, err error) error {
	return table.At(table.Place{Path: r.path, Line: r.line}, table.ErrUnreadable, what, do, err)
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
