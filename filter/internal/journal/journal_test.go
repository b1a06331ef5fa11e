package journal

import (
	"bytes"
	"errors"
	"fmt"
	"io"
	"math/rand/v2"
	"testing"
)

// memory is a file that takes at most room bytes; 0: any number.
type memory struct {
	b     []byte
	room  int
	syncs int
}

func (m *memory) ReadAt(p []byte, at int64) (int, error) { return bytes.NewReader(m.b).ReadAt(p, at) }

var errFull = errors.New("full")

func (m *memory) WriteAt(p []byte, at int64) (int, error) {
	end := int(at) + len(p)
	if m.room > 0 && end > m.room {
		return 0, errFull
	}
	for len(m.b) < end {
		m.b = append(m.b, 0)
	}
	return copy(m.b[at:], p), nil
}

func (m *memory) Truncate(n int64) error { m.b = m.b[:n]; return nil }
func (m *memory) Sync() error            { m.syncs++; return nil }

// history writes three parts of random lengths, and gives what each stream held at each mark.
func history(t *testing.T, f File, rng *rand.Rand, most int) (held []([3][]byte)) {
	t.Helper()
	j, err := Open(f)
	if err != nil {
		t.Fatal(err)
	}
	var all [3][]byte
	for part := range 3 {
		for range rng.IntN(6) {
			s, b := 1+rng.IntN(2), make([]byte, rng.IntN(most))
			for i := range b {
				b[i] = byte(rng.Uint32())
			}
			if err := j.Write(s, b); err != nil {
				t.Fatal(err)
			}
			all[s] = append(all[s], b...)
		}
		if err := j.Mark([]byte(fmt.Sprint("part ", part))); err != nil {
			t.Fatal(err)
		}
		held = append(held, [3][]byte{nil, bytes.Clone(all[1]), bytes.Clone(all[2])})
	}
	return held
}

// check opens what is there and compares it with what was written up to its last mark.
func check(t *testing.T, f File, held []([3][]byte)) (marks int) {
	t.Helper()
	j, err := Open(f)
	if err != nil {
		if !errors.Is(err, ErrForeign) {
			t.Fatal(err)
		}
		return -1
	}
	content, marks := j.Last()
	if marks > len(held) || marks > 0 && string(content) != fmt.Sprint("part ", marks-1) {
		t.Fatalf("%d marks, the last one is %q", marks, content)
	}
	for s := 1; s <= 2; s++ {
		got, err := io.ReadAll(j.Stream(s))
		var want []byte
		if marks > 0 {
			want = held[marks-1][s]
		}
		if err != nil || !bytes.Equal(got, want) {
			t.Fatalf("stream %d at mark %d has %d bytes, want %d; %v", s, marks, len(got), len(want), err)
		}
	}
	return marks
}

func TestStreamsComeBackUpToTheLastMark(t *testing.T) {
	for seed := range uint64(20) {
		f := &memory{}
		held := history(t, f, rand.New(rand.NewPCG(seed, 1)), 100_000)
		if marks := check(t, f, held); marks != 3 || f.syncs != 3 {
			t.Fatalf("%d marks, %d syncs", marks, f.syncs)
		}
	}
}

// Whatever happens to one byte, and wherever the file is cut, what is read is what was written up to some mark; never
// more or else.
func TestDamageCostsNoMoreThanWhatCameAfterIt(t *testing.T) {
	f := &memory{}
	held := history(t, f, rand.New(rand.NewPCG(3, 1)), 60)
	lost := map[int]int{}
	for n := range f.b {
		lost[check(t, &memory{b: bytes.Clone(f.b[:n])}, held)]++
		for _, flip := range []byte{1, 0x80, 0xff} {
			b := bytes.Clone(f.b)
			b[n] ^= flip
			if marks := check(t, &memory{b: b}, held); (marks < 0) != (n < headLen) || marks == 3 {
				t.Fatalf("byte %d changed: %d marks", n, marks)
			}
		}
	}
	for marks := range 3 {
		if lost[marks] == 0 {
			t.Errorf("no cut leaves %d marks", marks)
		}
	}
	if lost[3] > 0 || lost[-1] > 0 {
		t.Errorf("cuts leave %v", lost)
	}
	if marks := check(t, &memory{b: append(bytes.Clone(f.b), f.b[headLen:]...)}, held); marks != 3 {
		t.Errorf("with its frames repeated: %d marks", marks)
	}
}

func TestWritingGoesOnBehindTheLastMark(t *testing.T) {
	f := &memory{}
	held := history(t, f, rand.New(rand.NewPCG(3, 1)), 60)
	whole := bytes.Clone(f.b)
	f.b = append(f.b, "half a frame"...)
	j, err := Open(f)
	if err != nil {
		t.Fatal(err)
	}
	if len(f.b) == len(whole) {
		t.Error("Open has cut the file")
	}
	if err := errors.Join(j.Write(2, []byte("more")), j.Mark([]byte("part 3"))); err != nil {
		t.Fatal(err)
	}
	last := held[2]
	held = append(held, [3][]byte{nil, last[1], append(bytes.Clone(last[2]), "more"...)})
	if marks := check(t, f, held); marks != 4 || !bytes.HasPrefix(f.b, whole) {
		t.Errorf("%d marks", marks)
	}
}

func TestClearedJournalsBeginAnew(t *testing.T) {
	f := &memory{}
	history(t, f, rand.New(rand.NewPCG(3, 1)), 60)
	j, err := Open(f)
	if err != nil {
		t.Fatal(err)
	}
	j.Clear()
	if got, err := io.ReadAll(j.Stream(1)); len(got) > 0 || err != nil {
		t.Errorf("it holds %q, %v", got, err)
	}
	if err := errors.Join(j.Write(1, []byte("new")), j.Mark([]byte("part 0"))); err != nil {
		t.Fatal(err)
	}
	if marks := check(t, f, [][3][]byte{{1: []byte("new")}}); marks != 1 {
		t.Errorf("%d marks", marks)
	}
}

func TestOthersFilesAreLeftAlone(t *testing.T) {
	for _, text := range []string{"a", "grade,diameter_mm\n", "LWRESUMX\x01\x00", "LWRESUME\x02\x00", "LX"} {
		f := &memory{b: []byte(text)}
		if _, err := Open(f); !errors.Is(err, ErrForeign) || string(f.b) != text {
			t.Errorf("%q: got %v", text, err)
		}
	}
}

func TestTheFilesErrorComesBack(t *testing.T) {
	j, err := Open(&memory{room: 69_010})
	if err != nil {
		t.Fatal(err)
	}
	if err := j.Write(1, make([]byte, 69_000)); err != nil {
		t.Errorf("what fits: %v", err)
	}
	if err := j.Mark(nil); !errors.Is(err, errFull) {
		t.Errorf("got %v", err)
	}
}
