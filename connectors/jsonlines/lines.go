package jsonlines

import (
	"bytes"
	"fmt"

	"labelweir/connectors/internal/feed"
	"labelweir/connectors/jsonlines/internal/scan"
	"labelweir/connectors/table"
)

// limits of one line: a bound for what it can make us allocate, and for recursion.
func limits() scan.Limits { return scan.Limits{Depth: 64, Members: 1 << 16} }

// lines gives one line of the file after the other.
type lines struct {
	path string
	feed *feed.Feed

	scan   scan.Line
	text   []byte // the line without its LF; valid until the next call
	at     int64  // where it begins
	line   int64  // its number, counted from 1
	reason string // why it can't be read, "" when it can
	skip   int    // bytes to be taken off the window before the next line
	long   bool   // and then all up to the next LF
}

func newLines(f table.File, mostRow int) *lines {
	return &lines{path: f.Path, feed: feed.New(f, f.Size, mostRow)}
}

// next goes to the next line that is not blank and scans it; false at the end of the file.
func (l *lines) next() (bool, error) {
	for {
		if err := l.pass(); err != nil {
			return false, err
		}
		l.line++
		l.at = l.feed.Offset()
		ok, err := l.find()
		if !ok || err != nil {
			return false, err
		}
		if l.reason != "" {
			return true, nil
		}
		if len(bytes.Trim(l.text, " \t\r")) == 0 {
			continue
		}
		if f := l.scan.Scan(l.text, limits()); f.What != "" {
			l.reason = fmt.Sprintf("%s, at byte %d of the line", f.What, f.At+1)
		}
		return true, nil
	}
}

// pass leaves the line behind.
func (l *lines) pass() error {
	l.feed.Skip(l.skip)
	for l.skip = 0; l.long; {
		w := l.feed.Window()
		if i := bytes.IndexByte(w, '\n'); i >= 0 {
			l.feed.Skip(i + 1)
			l.long = false
		} else if l.feed.Skip(len(w)); l.feed.Ended() {
			l.long = false
		} else if err := l.feed.More(); err != nil {
			return l.fault("can't be read", "", err)
		}
	}
	return nil
}

// find sets text to the line at the window's front, reading on until it is whole.
func (l *lines) find() (bool, error) {
	l.reason = ""
	for seen := 0; ; {
		w := l.feed.Window()
		if i := bytes.IndexByte(w[seen:], '\n'); i >= 0 {
			l.text, l.skip = w[:seen+i], seen+i+1
			return true, nil
		}
		seen = len(w)
		if l.feed.Ended() {
			l.text, l.skip = w, len(w)
			return len(w) > 0, nil
		}
		switch err := l.feed.More(); {
		case err == feed.ErrTooLong:
			l.text, l.skip, l.long = w, len(w), true
			l.reason = fmt.Sprintf("has more than %d bytes; the rest of the line is left out", len(w))
			return true, nil
		case err != nil:
			return false, l.fault("can't be read", "", err)
		}
	}
}

// unreadable is the line as one that can't be read.
func (l *lines) unreadable() table.Unreadable {
	return table.Unreadable{File: l.path, Line: l.line, Byte: l.at, Bytes: l.text, Reason: l.reason}
}

// fault is an error at the line.
func (l *lines) fault(what, do string, err error) error {
	return table.At(table.Place{Path: l.path, Line: l.line}, table.ErrUnreadable, what, do, err)
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
