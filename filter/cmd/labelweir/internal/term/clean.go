package term

import (
	"io"
	"unicode/utf8"
)

// Clean gives a writer of text for people that passes nothing on which could command a terminal or forge a line in a log:
// names of columns and classes come from files of anybody. Control characters but line feed and tab, marks that turn the
// direction of writing, and bytes that are no UTF-8 become U+FFFD. It belongs to one goroutine.
func Clean(w io.Writer) io.Writer { return &clean{w: w} }

type clean struct {
	w    io.Writer
	out  []byte
	tail []byte // beginning of a character whose rest is to come
}

// Write implements io.Writer.
func (c *clean) Write(text []byte) (int, error) {
	in := append(c.tail, text...)
	c.out = c.out[:0]
	for len(in) > 0 && utf8.FullRune(in) {
		r, n := utf8.DecodeRune(in)
		if commands(r) {
			r = utf8.RuneError
		}
		c.out = utf8.AppendRune(c.out, r)
		in = in[n:]
	}
	c.tail = append([]byte(nil), in...)
	if _, err := c.w.Write(c.out); err != nil {
		return 0, err
	}
	return len(text), nil
}

// commands tells whether a terminal does something else with a character than to show it.
func commands(r rune) bool {
	switch {
	case r == '\n', r == '\t':
		return false
	case r < 0x20, r >= 0x7f && r < 0xa0: // C0, delete, C1
		return true
	case r >= 0x202a && r <= 0x202e, r >= 0x2066 && r <= 0x2069: // direction (Unicode Standard Annex 9)
		return true
	case r == 0x2028, r == 0x2029: // other line ends
		return true
	}
	return false
}
