// Package cut finds the cells of one row of comma-separated text (RFC 4180) without copying or allocating.
//
// It is as strict as the standard where two readings are possible and as lenient as common readers where one is: a cell
// that does not begin with a quote may hold quotes, which mean themselves; behind the closing quote only a delimiter
// or the row's end may come. A row ends with LF, CR LF or the file, which may have a CR before its
// end; a CR elsewhere is text.
package cut

import (
	"bytes"
	"encoding/binary"
	"math/bits"
)

// Cell is one cell of a row: Row[Lo:Hi], quotes left out. When Doubled is set, each quote in it stands there twice.
type Cell struct {
	Lo, Hi  int32
	Quoted  bool
	Doubled bool
}

// Fault says why a row can't be cut.
type Fault uint8

// Faults.
const (
	None       Fault = iota
	Open             // a quote is opened and never closed
	AfterQuote       // text behind a closing quote
)

// Row is what Row.Cut found.
type Row struct {
	Cells  []Cell // at most the number asked for; reused by the next Cut
	Count  int    // cells of the row, also those beyond
	Text   int    // bytes of the row without its end
	Next   int    // bytes up to the next row
	Lines  int    // line ends up to the next row
	Fault  Fault
	Column int // cell that has the fault, counted from 0
}

const quote = '"'

// Cut finds the row at the front of b, which is not empty. It tells false when b ends before the row does and end is
// not set: then call it again with more bytes. With end set, b is the rest of the file. Of a row with a fault only its
// first line is taken: Text and Next belong to that line. Cost O(bytes of the row); the row must be shorter than 2 GiB.
func (r *Row) Cut(b []byte, delimiter byte, most int, end bool) bool {
	r.Cells, r.Count, r.Lines, r.Fault = r.Cells[:0], 0, 1, None
	for at := 0; ; at++ {
		lo := at
		if at < len(b) && b[at] == quote {
			stop, doubled := r.closing(b, at+1, end)
			switch {
			case stop < 0 && !end:
				return false
			case stop < 0:
				return r.broken(b, Open, end)
			}
			at = stop + 1
			if at == len(b) && !end || at == len(b)-1 && b[at] == '\r' && !end {
				return false
			}
			if at < len(b) && b[at] != delimiter && !lineEnd(b, at, end) {
				return r.broken(b, AfterQuote, end)
			}
			r.add(Cell{int32(lo + 1), int32(stop), true, doubled}, most)
		} else {
			at = plainEnd(b, at, delimiter)
			hi := at
			if at == len(b) && !end {
				return false
			}
			if hi > lo && b[hi-1] == '\r' && (at == len(b) || b[at] == '\n') {
				hi--
			}
			r.add(Cell{int32(lo), int32(hi), false, false}, most)
			if at == len(b) || b[at] == '\n' {
				return r.whole(b, hi, at)
			}
			continue
		}
		if at == len(b) || b[at] != delimiter {
			hi := at
			if at < len(b) && b[at] == '\r' {
				at++
			}
			return r.whole(b, hi, at)
		}
	}
}

func (r *Row) add(c Cell, most int) {
	if r.Count < most {
		r.Cells = append(r.Cells, c)
	}
	r.Count++
}

// whole ends a row whose text ends at text and whose LF stands at lf, if there is one.
func (r *Row) whole(b []byte, text, lf int) bool {
	r.Text, r.Next = text, min(lf+1, len(b))
	return true
}

// broken ends a row with a fault behind its first line, once that line is there.
func (r *Row) broken(b []byte, f Fault, end bool) bool {
	r.Text, r.Next = len(b), len(b)
	if i := bytes.IndexByte(b, '\n'); i >= 0 {
		r.Text, r.Next = i, i+1
	} else if !end {
		return false
	}
	if r.Text > 0 && b[r.Text-1] == '\r' {
		r.Text--
	}
	r.Fault, r.Column, r.Lines = f, r.Count, 1
	return true
}

// closing finds the quote that closes a cell whose text begins at at; −1 when b ends before it is sure.
func (r *Row) closing(b []byte, at int, end bool) (stop int, doubled bool) {
	for {
		i := bytes.IndexByte(b[at:], quote)
		if i < 0 {
			return -1, doubled
		}
		r.Lines += bytes.Count(b[at:at+i], []byte{'\n'})
		at += i
		if at+1 == len(b) && !end {
			return -1, doubled
		}
		if at+1 == len(b) || b[at+1] != quote {
			return at, doubled
		}
		doubled = true
		at += 2
	}
}

// lineEnd tells whether LF, CR LF or the file's last CR stands at at.
func lineEnd(b []byte, at int, end bool) bool {
	return b[at] == '\n' || b[at] == '\r' && (at+1 < len(b) && b[at+1] == '\n' || at+1 == len(b) && end)
}

// plainEnd is where the first delimiter or LF from at on stands, or len(b). Eight bytes at a time: a byte of x is zero
// exactly where the lowest set bit of (x − 0x01…) &^ x & 0x80… says so (Knuth, TAOCP 4A, 7.1.3).
func plainEnd(b []byte, at int, delimiter byte) int {
	const ones, highs = 0x0101010101010101, 0x8080808080808080
	d := ones * uint64(delimiter)
	for ; at+8 <= len(b); at += 8 {
		w := binary.LittleEndian.Uint64(b[at:])
		x, y := w^d, w^(ones*'\n')
		if m := ((x-ones)&^x | (y-ones)&^y) & highs; m != 0 {
			return at + bits.TrailingZeros64(m)/8
		}
	}
	for at < len(b) && b[at] != delimiter && b[at] != '\n' {
		at++
	}
	return at
}
