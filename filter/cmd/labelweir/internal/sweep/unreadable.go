package sweep

import (
	"bufio"
	"encoding/json"
	"io"
	"unicode/utf8"

	"labelweir/connectors/table"
)

// unreadable writes rows that can't be read as JSON lines, each once: an input may be read several times.
type unreadable struct {
	file *table.Target
	buf  *bufio.Writer
	rows int64
}

// unreadableRow is one line.
type unreadableRow struct {
	File   string  `json:"file"`
	Line   int64   `json:"line"` // from 1
	Byte   int64   `json:"byte"` // from 0
	Reason string  `json:"reason"`
	Text   *string `json:"text,omitempty"`  // the row as it stands in the file
	Bytes  []byte  `json:"bytes,omitempty"` // the same in base64, when it is no UTF-8
}

// openUnreadable begins the file at path; path "" gives nil, with which the first row that can't be read is an error.
func openUnreadable(path string, options table.Options) (*unreadable, error) {
	t, err := table.NewTarget(path, options)
	if err != nil || t == nil {
		return nil, err
	}
	return &unreadable{file: t, buf: bufio.NewWriter(t)}, nil
}

// taker is what a reading is opened with: only the one that counts hands rows on.
func (u *unreadable) taker(counts bool) func(table.Unreadable) error {
	switch {
	case u == nil:
		return nil
	case counts:
		return u.take
	}
	return func(table.Unreadable) error { return nil }
}

func (u *unreadable) take(row table.Unreadable) error {
	line := unreadableRow{File: row.File, Line: row.Line, Byte: row.Byte, Reason: row.Reason}
	if utf8.Valid(row.Bytes) {
		text := string(row.Bytes)
		line.Text = &text
	} else {
		line.Bytes = row.Bytes
	}
	u.rows++
	e := json.NewEncoder(u.buf)
	e.SetEscapeHTML(false)
	return e.Encode(line)
}

// count is how many rows could not be read.
func (u *unreadable) count() int64 {
	if u == nil {
		return 0
	}
	return u.rows
}

// finish brings the rows to the disk.
func (u *unreadable) finish() error {
	if u == nil {
		return nil
	}
	return u.file.Fill(func(io.Writer) error { return u.buf.Flush() })
}

// target is the file, for the commit.
func (u *unreadable) target() *table.Target {
	if u == nil {
		return nil
	}
	return u.file
}

// drop removes the file where it was not committed.
func (u *unreadable) drop() {
	if u != nil {
		u.file.Drop()
	}
}
