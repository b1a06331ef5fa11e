// Package cell reads what the text of one cell means, and guesses what the cells of a column mean together. Nothing in
// it allocates for a cell.
package cell

import (
	"math"
	"strconv"
)

// Bool reads true and false in any capitals.
func Bool(b []byte) (v, ok bool) {
	switch b = trim(b); len(b) {
	case 4:
		return true, is(b, "true")
	case 5:
		return false, is(b, "false")
	}
	return false, false
}

// trim takes blanks and tabs off both ends.
func trim(b []byte) []byte {
	for len(b) > 0 && (b[0] == ' ' || b[0] == '\t') {
		b = b[1:]
	}
	for len(b) > 0 && (b[len(b)-1] == ' ' || b[len(b)-1] == '\t') {
		b = b[:len(b)-1]
	}
	return b
}

// is compares b, capitals aside, with a word of small letters.
func is(b []byte, word string) bool {
	for i := range b {
		if b[i]|0x20 != word[i] {
			return false
		}
	}
	return true
}

// Int reads a whole number in decimal digits that fits 64 bits with sign.
func Int(b []byte) (int64, bool) {
	b = trim(b)
	if len(b) == 0 {
		return 0, false
	}
	digits := b
	if b[0] == '-' || b[0] == '+' {
		digits = b[1:]
	}
	for len(digits) > 1 && digits[0] == '0' {
		digits = digits[1:]
	}
	if len(digits) == 0 || len(digits) > 19 {
		return 0, false
	}
	v := uint64(0)
	for _, c := range digits {
		if c < '0' || c > '9' {
			return 0, false
		}
		v = 10*v + uint64(c-'0') // 19 digits fit
	}
	switch {
	case b[0] == '-' && v <= 1<<63:
		return -int64(v), true
	case b[0] != '-' && v <= math.MaxInt64:
		return int64(v), true
	}
	return 0, false
}

// Number reads a decimal number with or without point and exponent. Names of what is no finite number (nan, inf) don't
// count, nor do numbers too large for a float64.
func Number(b []byte) (float64, bool) {
	b = trim(b)
	if v, ok := short(b); ok {
		return v, true
	}
	if len(b) == 0 {
		return 0, false
	}
	for _, c := range b {
		if (c < '0' || c > '9') && c != '.' && c != '-' && c != '+' && c != 'e' && c != 'E' {
			return 0, false
		}
	}
	v, err := strconv.ParseFloat(string(b), 64)
	return v, err == nil
}

// powers of ten up to 15, never changed.
var powers = [16]float64{1, 1e1, 1e2, 1e3, 1e4, 1e5, 1e6, 1e7, 1e8, 1e9, 1e10, 1e11, 1e12, 1e13, 1e14, 1e15}

// short reads a number of at most 15 digits without an exponent. Digits and power of ten are then exact in a float64, and
// so is their quotient's rounding (Clinger, How to read floating point numbers accurately, 1990).
func short(b []byte) (float64, bool) {
	if len(b) == 0 || len(b) > 17 {
		return 0, false
	}
	negative := b[0] == '-'
	if negative || b[0] == '+' {
		b = b[1:]
	}
	mantissa, digits, point := uint64(0), 0, -1
	for i, c := range b {
		switch {
		case c-'0' <= 9:
			mantissa = 10*mantissa + uint64(c-'0')
			digits++
		case c == '.' && point < 0:
			point = i
		default:
			return 0, false
		}
	}
	if digits == 0 || digits > 15 {
		return 0, false
	}
	v := float64(mantissa)
	if point >= 0 {
		v /= powers[digits-point]
	}
	if negative {
		v = -v
	}
	return v, true
}

// Missing tells whether a cell says in words, or by being empty, that it has no value.
func Missing(b []byte) bool {
	switch string(trim(b)) {
	case "", "NA", "N/A", "n/a", "na", "#N/A", "NaN", "nan", "-nan", "null", "NULL", "Null", "None", "none", "?", "-", ".":
		return true
	}
	return false
}
