package half

import (
	"math"
	"testing"

	"github.com/apache/arrow/go/v16/arrow/float16"
)

// The limits of binary16 as IEEE 754-2019, table 3.5, gives them (emin −14, emax 15, p 11), and numpy.float16 prints them.
func TestLimits(t *testing.T) {
	for bits, want := range map[uint16]float64{
		0x0001: 5.960464477539063e-08, // smallest
		0x03ff: 6.097555160522461e-05, // largest subnormal
		0x0400: 6.103515625e-05,       // smallest normal
		0x3555: 0.333251953125,
		0x3c00: 1,
		0x7bff: 65504,
		0x8001: -5.960464477539063e-08,
		0xc000: -2,
		0x7c00: math.Inf(1),
		0xfc00: math.Inf(-1),
	} {
		if got := Value(bits); got != want {
			t.Errorf("%#04x: got %v, want %v", bits, got, want)
		}
	}
	if !math.IsNaN(Value(0x7e00)) || !math.IsNaN(Value(0xfc01)) {
		t.Error("no NaN")
	}
	if v := Value(0x8000); v != 0 || !math.Signbit(v) {
		t.Errorf("got %v, want -0", v)
	}
}

// The reference is arrow/go's own reading, which is right for normal numbers.
func TestNormalNumbersAreThoseOfArrow(t *testing.T) {
	for bits := range 1 << 16 {
		if exp := bits >> 10 & 31; exp == 0 || exp == 31 {
			continue
		}
		if got, want := Value(uint16(bits)), float64(float16.FromBits(uint16(bits)).Float32()); got != want {
			t.Fatalf("%#04x: got %v, want %v", bits, got, want)
		}
	}
}
