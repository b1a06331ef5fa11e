package jsonlines

import (
	"bytes"
	"fmt"
	"io"

	"labelweir/connectors/internal/feed"
	"labelweir/connectors/internal/textrows"
	"labelweir/connectors/jsonlines/internal/scan"
	"labelweir/connectors/table"
)

// limits of one line: a bound for what it can make us allocate, and for recursion.
func limits() scan.Limits { return scan.Limits{Depth: 64, Members: 1 << 16} }

// lines gives one line of the file after the other.
type lines struct {
	textrows.Cursor
	scan scan.Line
}

func newLines(f table.File, mostRow int) *lines {
	return &lines{Cursor: textrows.NewCursor(f, mostRow)}
}

// begin passes a byte order mark, which it gives.
func (l *lines) begin(f table.File) (mark string, err error) {
	head := make([]byte, 4)
	n, err := f.ReadAt(head, 0)
	if err != nil && err != io.EOF {
		return "", l.Fault("can't be read", "", err)
	}
	if what, do := textrows.Foreign(head[:n]); what != "" {
		return "", l.Fault(what, do, nil)
	}
	if bytes.HasPrefix(head[:n], []byte(textrows.ByteOrderMark)) {
		mark = textrows.ByteOrderMark
	}
	l.Feed.Restart(int64(len(mark)))
	return mark, nil
}

// Next goes to the next line that is not blank and scans it; false at the end of the file.
func (l *lines) Next() (bool, error) {
	for {
		if err := l.Step(); err != nil {
			return false, err
		}
		l.Beyond++
		if ok, err := l.find(); !ok || err != nil {
			return false, err
		}
		if l.Reason != "" {
			return true, nil
		}
		if len(bytes.Trim(l.Row, " \t\r")) == 0 {
			continue
		}
		if f := l.scan.Scan(l.Row, limits()); f.What != "" {
			l.Reason = fmt.Sprintf("%s, at byte %d of the line", f.What, f.At+1)
		}
		return true, nil
	}
}

// find finds the end of the line at the window's front, reading on until it is whole.
func (l *lines) find() (bool, error) {
	for seen := 0; ; {
		w := l.Feed.Window()
		if i := bytes.IndexByte(w[seen:], '\n'); i >= 0 {
			l.Row, l.Skip = w[:seen+i], seen+i+1
			return true, nil
		}
		seen = len(w)
		if l.Feed.Ended() {
			l.Row, l.Skip = w, len(w)
			return len(w) > 0, nil
		}
		switch err := l.More(); {
		case err == feed.ErrTooLong:
			l.CutOff()
			return true, nil
		case err != nil:
			return false, err
		}
	}
}

// textOf is what a string or name means; scratch is used when it has escapes, and given back.
func textOf(line []byte, p scan.Place, scratch []byte) (text, scratchToo []byte) {
	b := line[p.Lo:p.Hi]
	if !p.Escaped {
		return b, scratch
	}
	scratch = scan.Unescape(scratch[:0], b)
	return scratch, scratch
}
