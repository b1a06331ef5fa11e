package textrows

import (
	"bytes"
	"fmt"

	"labelweir/connectors/internal/feed"
	"labelweir/connectors/table"
)

// Cursor stands at one row of a file. Formats embed it and find each row's end; it belongs to one goroutine.
type Cursor struct {
	Path string     // of the file, for messages
	Feed *feed.Feed // its window begins with the row

	Row    []byte // the row without its line's end; valid until the next Step
	At     int64  // where it begins, in bytes from 0
	Line   int64  // where it begins, counted from 1
	Reason string // why it can't be read, "" when it can

	Beyond int64 // line of the next row
	Skip   int   // bytes of the row, its line's end included

	size int64
	long bool // the row's line goes on behind Skip
}

// NewCursor stands before the first row of a file whose rows have at most mostRow bytes.
func NewCursor(f table.File, mostRow int) Cursor {
	return Cursor{Feed: feed.New(f, f.Size, mostRow), Beyond: 1, Path: f.Path, size: f.Size}
}

// Step leaves the row behind: the window begins with the next one then, or is empty at the file's end.
func (c *Cursor) Step() error {
	c.Feed.Skip(c.Skip)
	for c.Skip = 0; c.long; {
		w := c.Feed.Window()
		if i := bytes.IndexByte(w, '\n'); i >= 0 {
			c.Feed.Skip(i + 1)
			c.long = false
		} else if c.Feed.Skip(len(w)); c.Feed.Ended() {
			c.long = false
		} else if err := c.More(); err != nil {
			return err
		}
	}
	c.At, c.Line, c.Reason = c.Feed.Offset(), c.Beyond, ""
	return nil
}

// rest skips the row, which must not be used any more, and gives back what memory it took beyond the usual.
func (c *Cursor) rest() {
	c.Feed.Skip(c.Skip)
	c.Skip, c.Row = 0, nil
	c.Feed.Trim()
}

// More makes the window longer. It gives feed.ErrTooLong when the row has more bytes than it may, else an error to be told.
func (c *Cursor) More() error {
	err := c.Feed.More()
	if err == nil || err == feed.ErrTooLong {
		return err
	}
	return c.Fault("can't be read", "", err)
}

// CutOff makes the window a row that can't be read; the rest of its line is passed over.
func (c *Cursor) CutOff() {
	c.Row = c.Feed.Window()
	c.Skip, c.long = len(c.Row), true
	c.Reason = fmt.Sprintf("has more than %d bytes; the rest of the line is left out", len(c.Row))
}

// Fault is an error at the row.
func (c *Cursor) Fault(what, do string, err error) error {
	return table.At(table.Place{Path: c.Path, Line: c.Line}, table.ErrUnreadable, what, do, err)
}

// unreadable is the row as one that can't be read.
func (c *Cursor) unreadable() table.Unreadable {
	return table.Unreadable{File: c.Path, Line: c.Line, Byte: c.At, Bytes: c.Row, Reason: c.Reason}
}
