package cell

import (
	"math"
	"math/rand/v2"
	"strconv"
	"testing"
)

func TestCellsThatSayMoreThanTheirValue(t *testing.T) {
	for text, want := range map[string][2]bool{ // as a whole number, as a number
		"7": {true, true}, "-7": {true, true}, " 7\t": {true, true}, "0": {true, true}, "700": {true, true},
		"9223372036854775807": {true, false}, "-9223372036854775808": {true, true}, "9007199254740992": {true, true},
		"9007199254740993": {true, false}, "12345678901234567890": {false, false}, "100000000000000000000": {false, true},
		"007": {false, false}, "-07": {false, false}, "00": {false, false}, "+3": {false, false}, "-0": {false, true}, "": {false, false}, "x": {false, false},
		"0.5": {false, true}, ".5": {false, true}, "5.": {false, true}, "1.50": {false, true}, "00.5": {false, false}, "-0.0": {false, true},
		"1e3": {false, true}, "1E-3": {false, true}, "1e-400": {false, false}, "5e-324": {false, true}, "1.23456e-320": {false, false},
		"0.1": {false, true}, "0.10000000000000001": {false, true}, "0.1000000000000000055511151231257827": {false, true},
		"0.10000000000000002": {false, true}, "0.100000000000000012": {false, false}, "3.14159265358979323846": {false, false}, "0e5": {false, true},
	} {
		if got := [2]bool{ExactInt([]byte(text)), ExactNumber([]byte(text))}; got != want {
			t.Errorf("%q: got %v, want %v", text, got, want)
		}
	}
}

// What the standard library's strconv writes of a number, in any of its ways, is exact.
func TestWhatStrconvWritesIsExact(t *testing.T) {
	r := rand.New(rand.NewPCG(5, 6))
	for range 100_000 {
		v := math.Float64frombits(r.Uint64())
		if math.IsNaN(v) || math.IsInf(v, 0) {
			continue
		}
		for _, digits := range []int{-1, 0, 5, 15, 16, 20} {
			text := strconv.AppendFloat(nil, v, 'e', digits, 64)
			if back, _ := strconv.ParseFloat(string(text), 64); !ExactNumber(text) && (digits < 0 || digits >= 16 || digits < 15 && math.Abs(back) > normal && !math.IsInf(back, 0)) {
				t.Fatalf("%s", text)
			}
		}
		if text := strconv.AppendInt(nil, int64(r.Uint64()), 10); !ExactInt(text) {
			t.Fatalf("%s", text)
		}
	}
}

func TestExactAllocatesNothing(t *testing.T) {
	short, whole := []byte("71.52030"), []byte("-4711")
	if n := testing.AllocsPerRun(100, func() { ExactNumber(short); ExactInt(whole) }); n != 0 {
		t.Errorf("%v allocations", n)
	}
}
