package scan

import (
	"strconv"
	"unicode/utf16"
	"unicode/utf8"
)

// Unescape appends what a string that has escapes in it means, for a string that Scan let through. Halves of surrogate
// pairs that stand alone become U+FFFD.
func Unescape(dst, b []byte) []byte {
	for i := 0; i < len(b); i++ {
		if b[i] != '\\' {
			dst = append(dst, b[i])
			continue
		}
		i++
		switch c := b[i]; c {
		case 'b':
			dst = append(dst, '\b')
		case 'f':
			dst = append(dst, '\f')
		case 'n':
			dst = append(dst, '\n')
		case 'r':
			dst = append(dst, '\r')
		case 't':
			dst = append(dst, '\t')
		case 'u':
			r := hex4(b[i+1:])
			i += 4
			if utf16.IsSurrogate(r) {
				r2 := rune(-1)
				if i+6 < len(b) && b[i+1] == '\\' && b[i+2] == 'u' {
					r2 = hex4(b[i+3:])
				}
				if r = utf16.DecodeRune(r, r2); r != utf8.RuneError {
					i += 6
				}
			}
			dst = utf8.AppendRune(dst, r)
		default:
			dst = append(dst, c)
		}
	}
	return dst
}

// hex4 reads four hexadecimal digits.
func hex4(b []byte) (r rune) {
	for _, c := range b[:4] {
		r = r<<4 | rune(nibble(c))
	}
	return r
}

// nibble is the value of a hexadecimal digit, −1 for another byte.
func nibble(c byte) int {
	switch {
	case c >= '0' && c <= '9':
		return int(c - '0')
	case c >= 'a' && c <= 'f':
		return int(c - 'a' + 10)
	case c >= 'A' && c <= 'F':
		return int(c - 'A' + 10)
	}
	return -1
}

// Numbers appends the elements of an array that Scan let through, when all of them are numbers; null gives none. ok is
// false for another array, for one of more than most elements, and for numbers too large for a float64.
func Numbers(dst []float64, b []byte, none float64, most int) (out []float64, ok bool) {
	first := len(dst)
	for i := 1; i < len(b); {
		if len(dst)-first > most {
			return dst, false
		}
		switch c := b[i]; {
		case c == ',' || c == ' ' || c == '\t' || c == '\r' || c == '\n' || c == ']':
			i++
		case c == 'n':
			dst = append(dst, none)
			i += len("null")
		case c == '-' || c >= '0' && c <= '9':
			lo := i
			for b[i] != ',' && b[i] != ']' && b[i] > ' ' {
				i++
			}
			v, err := strconv.ParseFloat(string(b[lo:i]), 64)
			if err != nil {
				return dst, false
			}
			dst = append(dst, v)
		default:
			return dst, false
		}
	}
	return dst, true
}
