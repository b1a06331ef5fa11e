package cell

import (
	"bytes"
	"strconv"
)

// A cell is exact when its value tells all that the text says, so that the text may go. What the text says are its digits
// and its sign: blanks around it, and how the point and the exponent stand, are no loss. Codes ("007", "+49171"), "-0" for
// a whole number, and more digits than a float64 holds (an identifier of 20 digits) are.

// ExactInt tells whether a cell is a whole number, for which Int holds, and exact.
func ExactInt(b []byte) bool {
	b = trim(b)
	if _, ok := Int(b); !ok || b[0] == '+' || string(b) == "-0" {
		return false
	}
	return !zeroLed(b)
}

// ExactNumber tells whether a cell is a number, for which Number holds, and exact.
func ExactNumber(b []byte) bool {
	b = trim(b)
	v, ok := Number(b)
	if !ok || b[0] == '+' || zeroLed(b) {
		return false
	}
	var scratch, spelled [64]byte
	digits := significant(scratch[:0], b)
	if len(digits) == 0 || len(digits) <= surely && (v > normal || v < -normal) {
		return true
	}
	return bytes.Equal(digits, significant(spelled[:0], strconv.AppendFloat(nil, v, 'e', len(digits)-1, 64)))
}

const (
	surely = 15                      // digits that every normal float64 holds (DBL_DIG of C)
	normal = 2.2250738585072014e-308 // the smallest normal float64 (DBL_MIN)
)

// zeroLed tells whether a number has a zero in front of a digit, as codes have.
func zeroLed(b []byte) bool {
	if b[0] == '-' || b[0] == '+' {
		b = b[1:]
	}
	return len(b) > 1 && b[0] == '0' && b[1] >= '0' && b[1] <= '9'
}

// significant appends a number's digits from the first to the last that is not zero, the exponent's left out.
func significant(dst, b []byte) []byte {
	for _, c := range b {
		if c == 'e' || c == 'E' {
			break
		}
		if c >= '1' && c <= '9' || c == '0' && len(dst) > 0 {
			dst = append(dst, c)
		}
	}
	return bytes.TrimRight(dst, "0")
}
