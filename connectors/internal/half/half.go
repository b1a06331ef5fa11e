// Package half reads numbers of 16 bits. arrow/go v16 takes the smallest ones for zero.
package half

import "math"

// Value is the value of a binary16 (IEEE 754-2019, section 3.4): a sign bit, five of exponent and ten of fraction.
func Value(bits uint16) float64 {
	v := 0.
	switch exp, frac := int(bits>>10&31), float64(bits&1023); exp {
	case 0:
		v = math.Ldexp(frac, -24)
	case 31:
		if v = math.Inf(1); frac > 0 {
			return math.NaN()
		}
	default:
		v = math.Ldexp(1024+frac, exp-25)
	}
	return math.Copysign(v, 1-2*float64(bits>>15))
}
