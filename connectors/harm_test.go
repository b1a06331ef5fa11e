package connectors

import (
	"bytes"
	"encoding/binary"
	"math"
	"math/rand/v2"
)

// harm is one way to damage a file. other is another file, of any format, to take bytes from.
type harm struct {
	name string
	do   func(r *rand.Rand, b, other []byte) []byte
}

// harms are the ways for all formats. None changes the bytes given.
func harms() []harm {
	return []harm{
		{"bits flipped", flip},
		{"words overwritten", overwrite},
		{"words near the end", func(r *rand.Rand, b, other []byte) []byte {
			return within(r, b, len(b)-min(len(b), 600), len(b), overwrite)
		}},
		{"words near the start", func(r *rand.Rand, b, other []byte) []byte { return within(r, b, 0, min(len(b), 600), overwrite) }},
		{"cut short", func(r *rand.Rand, b, _ []byte) []byte { return b[:r.IntN(len(b))] }},
		{"piece cut out", func(r *rand.Rand, b, _ []byte) []byte {
			lo, hi := span(r, len(b))
			return join(b[:lo], b[hi:])
		}},
		{"piece twice", func(r *rand.Rand, b, _ []byte) []byte {
			lo, hi := span(r, len(b))
			return join(b[:hi], b[lo:])
		}},
		{"pieces swapped", func(r *rand.Rand, b, _ []byte) []byte {
			out := bytes.Clone(b)
			n := 1 + r.IntN(max(1, len(b)/8))
			from, to := 8*r.IntN(max(1, (len(b)-n)/8)), 8*r.IntN(max(1, (len(b)-n)/8))
			copy(out[to:to+n], b[from:from+n])
			copy(out[from:from+n], b[to:to+n])
			return out
		}},
		{"piece of another file", func(r *rand.Rand, b, other []byte) []byte {
			lo, hi := span(r, len(b))
			from, to := span(r, len(other))
			if r.IntN(2) == 0 { // as long as what it takes the place of, so that all else stays where it was
				n := min(hi-lo, to-from)
				out := bytes.Clone(b)
				copy(out[lo:lo+n], other[from:])
				return out
			}
			return join(b[:lo], other[from:to], b[hi:])
		}},
	}
}

// textHarms are those for lines of text.
func textHarms() []harm {
	marks := []string{"\"", "\n", "\r\n", ",", ";", "\x00", "\xff", "{", "}", "[", "]", ":", "\\", "\\u", "1e999", "-", "NaN", "null", "\ufeff", "\"\"\""}
	return []harm{
		{"marks set in", func(r *rand.Rand, b, _ []byte) []byte {
			for range 1 + r.IntN(5) {
				at := r.IntN(len(b) + 1)
				b = join(b[:at], []byte(marks[r.IntN(len(marks))]), b[at:])
			}
			return b
		}},
		{"brackets without end", func(r *rand.Rand, b, _ []byte) []byte {
			at := r.IntN(len(b) + 1)
			return join(b[:at], bytes.Repeat([]byte{"[{\""[r.IntN(3)]}, 1+r.IntN(5000)), b[at:])
		}},
		{"line ends gone", func(r *rand.Rand, b, _ []byte) []byte {
			at := r.IntN(len(b))
			return join(b[:at], bytes.ReplaceAll(b[at:], []byte("\n"), []byte(" ")))
		}},
	}
}

// arrowHarms damage where messages of Arrow IPC begin, known by their four bytes of 0xFF.
func arrowHarms() []harm {
	return []harm{
		{"messages out of order", func(r *rand.Rand, b, other []byte) []byte {
			parts := messages(b)
			if r.IntN(2) == 0 { // dictionaries and record batches of another file
				parts = append(parts, messages(other)...)
			}
			if len(parts) < 2 {
				return flip(r, b, nil)
			}
			for range 1 + r.IntN(3) {
				i, k := r.IntN(len(parts)), r.IntN(len(parts))
				switch r.IntN(3) {
				case 0:
					parts[i], parts[k] = parts[k], parts[i]
				case 1:
					parts[i] = parts[k]
				default:
					parts = append(parts[:i], append([][]byte{parts[k%len(parts)]}, parts[i:]...)...)
				}
			}
			return join(parts...)
		}},
		{"words in a message's head", func(r *rand.Rand, b, _ []byte) []byte {
			parts := messages(b)
			at := 0
			for _, p := range parts[:r.IntN(len(parts))] {
				at += len(p)
			}
			return within(r, b, at, min(len(b), at+400), overwrite)
		}},
	}
}

// messages cuts Arrow bytes before each message; what comes before the first one goes with it.
func messages(b []byte) (parts [][]byte) {
	mark := []byte{0xFF, 0xFF, 0xFF, 0xFF}
	for at := 4; ; at++ {
		k := bytes.Index(b[min(at, len(b)):], mark)
		if k < 0 {
			return append(parts, b)
		}
		if at += k; at%8 == 0 {
			parts = append(parts, b[:at:at])
			b, at = b[at:], 3
		}
	}
}

func flip(r *rand.Rand, b, _ []byte) []byte {
	out := bytes.Clone(b)
	for range 1 + r.IntN(8) {
		out[r.IntN(len(out))] ^= 1 << r.IntN(8)
	}
	return out
}

// overwrite puts numbers over words: lengths, offsets and indices that are negative, huge, or a little wrong.
func overwrite(r *rand.Rand, b, _ []byte) []byte {
	out := bytes.Clone(b)
	for range 1 + r.IntN(4) {
		size := []int{1, 2, 4, 4, 8, 8}[r.IntN(6)]
		if len(out) < 2*size {
			continue
		}
		at := r.IntN(len(out)/size-1) * size
		var word [8]byte
		copy(word[:], out[at:at+size])
		was := binary.LittleEndian.Uint64(word[:])
		numbers := []uint64{0, 1, math.MaxUint64, math.MaxInt64, math.MaxInt32, 1 << 31, 1<<32 - 1, 1 << 30, 1 << 33,
			uint64(len(b)), was + 1, was - 1, was * 2, 1 << r.IntN(63), r.Uint64()}
		binary.LittleEndian.PutUint64(word[:], numbers[r.IntN(len(numbers))])
		copy(out[at:at+size], word[:])
	}
	return out
}

// within damages only bytes lo to hi.
func within(r *rand.Rand, b []byte, lo, hi int, do func(*rand.Rand, []byte, []byte) []byte) []byte {
	if hi-lo < 16 {
		return do(r, b, nil)
	}
	return join(b[:lo], do(r, b[lo:hi], nil), b[hi:])
}

// span is a piece of at least one byte, most often a short one.
func span(r *rand.Rand, n int) (lo, hi int) {
	lo = r.IntN(n)
	most := n - lo
	if r.IntN(3) > 0 {
		most = min(most, 64)
	}
	return lo, lo + 1 + r.IntN(most)
}

func join(parts ...[]byte) []byte { return bytes.Join(parts, nil) }
