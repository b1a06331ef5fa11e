// Package scan finds the members of one JSON object (RFC 8259) without copying or allocating. It is strict: what it
// lets through is valid JSON to its last byte, and UTF-8.
package scan

import (
	"encoding/binary"
	"unicode/utf8"
)

// Kind is what a value is.
type Kind uint8

// Kinds.
const (
	Null Kind = iota
	Bool
	Number
	String
	Array
	Object
)

// Member is one member of the object. Key and Value are places in the line; those of strings leave out the quotes.
type Member struct {
	Key, Value Place
	Kind       Kind
}

// Place is b[Lo:Hi] of the line b. Escaped tells whether a string has escapes in it.
type Place struct {
	Lo, Hi  int32
	Escaped bool
}

// Fault says why a line is no object. The zero Fault is none.
type Fault struct {
	What string
	At   int // byte of the line, counted from 0
}

// Limits bound what one line may ask for.
type Limits struct {
	Depth   int // of objects and arrays in each other, the line's own object included
	Members int // of the line's own object
}

// Line is the members of a line.
type Line struct {
	Members []Member // reused by the next Scan

	limits Limits
	b      []byte
	fault  Fault
}

// Scan finds the members of the object that b holds, blanks around it aside. b must be shorter than 2 GiB. The members
// stay valid until the next Scan, their places as long as b.
func (l *Line) Scan(b []byte, limits Limits) Fault {
	l.Members, l.limits, l.b, l.fault = l.Members[:0], limits, b, Fault{}
	if !utf8.Valid(b) {
		return Fault{"the bytes are not UTF-8 text", invalid(b)}
	}
	at := l.blanks(0)
	switch {
	case at == len(b):
		return Fault{"the line ends too early", at}
	case b[at] != '{':
		if l.value(at, 0); l.fault.What != "" {
			return l.fault
		}
		return Fault{"the line is no object", at}
	}
	if at = l.object(at, 1, true); l.fault.What != "" {
		return l.fault
	}
	if at = l.blanks(at); at < len(b) {
		return Fault{"something stands behind the object", at}
	}
	return Fault{}
}

// invalid is the first byte that is not UTF-8.
func invalid(b []byte) int {
	at := 0
	for at < len(b) {
		r, n := utf8.DecodeRune(b[at:])
		if r == utf8.RuneError && n == 1 {
			return at
		}
		at += n
	}
	return at
}

// fail sets the fault, and ends the line so that all that is under way stops.
func (l *Line) fail(what string, at int) int {
	if l.fault.What == "" {
		if at >= len(l.b) {
			what, at = "the line ends too early", len(l.b)
		}
		l.fault = Fault{what, at}
	}
	return len(l.b)
}

// blanks is where the first byte at or behind at stands that is no white space.
func (l *Line) blanks(at int) int {
	for at < len(l.b) && (l.b[at] == ' ' || l.b[at] == '\t' || l.b[at] == '\r' || l.b[at] == '\n') {
		at++
	}
	return at
}

// is tells whether c stands at at.
func (l *Line) is(at int, c byte) bool { return at < len(l.b) && l.b[at] == c }

// object passes the object that begins at at; own is the line's, whose members are kept. Like all that pass something
// it gives the byte behind, and sets the fault.
func (l *Line) object(at, depth int, own bool) int {
	if depth > l.limits.Depth {
		return l.fail("objects and arrays lie too deep in each other", at)
	}
	if at = l.blanks(at + 1); l.is(at, '}') {
		return at + 1
	}
	for {
		if !l.is(at, '"') {
			return l.fail("a name in quotes should stand here", at)
		}
		var m Member
		if m.Key, at = l.text(at); l.fault.What != "" {
			return at
		}
		if at = l.blanks(at); !l.is(at, ':') {
			return l.fail("a colon should stand here", at)
		}
		at = l.blanks(at + 1)
		if own && at < len(l.b) && l.b[at] == '"' {
			m.Kind = String
			m.Value, at = l.text(at)
		} else {
			m.Value.Lo = int32(at)
			m.Kind, at = l.value(at, depth)
			m.Value.Hi = int32(at)
		}
		if l.fault.What != "" {
			return at
		}
		if own {
			if len(l.Members) == l.limits.Members {
				return l.fail("the object has too many members", int(m.Key.Lo))
			}
			l.Members = append(l.Members, m)
		}
		at = l.blanks(at)
		if l.is(at, '}') {
			return at + 1
		}
		if !l.is(at, ',') {
			return l.fail("a comma or closing brace should stand here", at)
		}
		at = l.blanks(at + 1)
	}
}

// array passes the array that begins at at.
func (l *Line) array(at, depth int) int {
	if depth > l.limits.Depth {
		return l.fail("objects and arrays lie too deep in each other", at)
	}
	if at = l.blanks(at + 1); l.is(at, ']') {
		return at + 1
	}
	for {
		if _, at = l.value(at, depth); l.fault.What != "" {
			return at
		}
		at = l.blanks(at)
		if l.is(at, ']') {
			return at + 1
		}
		if !l.is(at, ',') {
			return l.fail("a comma or closing bracket should stand here", at)
		}
		at = l.blanks(at + 1)
	}
}

// value passes the value that begins at at, inside of something at depth.
func (l *Line) value(at, depth int) (Kind, int) {
	if at >= len(l.b) {
		return Null, l.fail("", at)
	}
	switch c := l.b[at]; {
	case c == '"':
		_, at = l.text(at)
		return String, at
	case c == '{':
		return Object, l.object(at, depth+1, false)
	case c == '[':
		return Array, l.array(at, depth+1)
	case c == '-' || c >= '0' && c <= '9':
		return Number, l.number(at)
	case c == 't':
		return Bool, l.word(at, "true")
	case c == 'f':
		return Bool, l.word(at, "false")
	case c == 'n':
		return Null, l.word(at, "null")
	}
	return Null, l.fail("no value begins like this", at)
}

func (l *Line) word(at int, w string) int {
	for i := range w {
		if !l.is(at+i, w[i]) {
			return l.fail("no value begins like this", at+i)
		}
	}
	return at + len(w)
}

func (l *Line) number(at int) int {
	if l.is(at, '-') {
		at++
	}
	if l.is(at, '0') {
		at++
	} else if at = l.digits(at); l.fault.What != "" {
		return at
	}
	if l.is(at, '.') {
		if at = l.digits(at + 1); l.fault.What != "" {
			return at
		}
	}
	if l.is(at, 'e') || l.is(at, 'E') {
		if at++; l.is(at, '+') || l.is(at, '-') {
			at++
		}
		at = l.digits(at)
	}
	return at
}

// digits passes one digit or more.
func (l *Line) digits(at int) int {
	lo := at
	for at < len(l.b) && l.b[at]-'0' <= 9 {
		at++
	}
	if at == lo {
		return l.fail("a digit should stand here", at)
	}
	return at
}

// text passes the string whose quote stands at at.
func (l *Line) text(at int) (Place, int) {
	at++
	p := Place{Lo: int32(at)}
	for {
		at = plainEnd(l.b, at)
		switch {
		case at >= len(l.b):
			return p, l.fail("", at)
		case l.b[at] == '"':
			p.Hi = int32(at)
			return p, at + 1
		case l.b[at] == '\\':
			p.Escaped = true
			at = l.escape(at)
		default:
			at = l.fail("a control character stands in a string", at)
		}
		if l.fault.What != "" {
			return p, at
		}
	}
}

// escape passes the escape whose backslash stands at at.
func (l *Line) escape(at int) int {
	if at+1 >= len(l.b) {
		return l.fail("", at+1)
	}
	switch l.b[at+1] {
	case '"', '\\', '/', 'b', 'f', 'n', 'r', 't':
		return at + 2
	case 'u':
		for i := at + 2; i < at+6; i++ {
			if i >= len(l.b) || nibble(l.b[i]) < 0 {
				return l.fail("four hexadecimal digits should stand here", i)
			}
		}
		return at + 6
	}
	return l.fail("no escape begins like this", at)
}

// plainEnd is where the first quote, backslash or control character from at on stands, or len(b), eight bytes at a time
// (see Knuth, TAOCP 4A, 7.1.3; bytes from 0x80 on are never below 0x20).
func plainEnd(b []byte, at int) int {
	const ones, highs = 0x0101010101010101, 0x8080808080808080
	for ; at+8 <= len(b); at += 8 {
		w := binary.LittleEndian.Uint64(b[at:])
		x, y := w^(ones*'"'), w^(ones*'\\')
		if ((x-ones)&^x|(y-ones)&^y|(w-ones*' ')&^w)&highs != 0 {
			break
		}
	}
	for at < len(b) && b[at] != '"' && b[at] != '\\' && b[at] >= ' ' {
		at++
	}
	return at
}
