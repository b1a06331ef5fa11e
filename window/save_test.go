package window

import (
	"bytes"
	"errors"
	"flag"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"testing/iotest"
	"time"
)

var update = flag.Bool("update", false, "write the golden files anew")

// small is a window with something of everything in it.
func small(t testing.TB) *Window {
	w := must(t, Policy{Records: 12, Span: time.Hour, Bytes: 1 << 16, Keep: Uniform, Floor: 2, Seed: 3})
	l := newLine(1)
	grades := []string{"first", "second", "", "cull"}
	table, first := l.table(30, func(i int) string { return grades[i%4] })
	times := make([]int64, 30)
	for i := range times {
		times[i] = int64(i) * minute
	}
	times[20] = unknown
	if err := w.Append(table, first, times, 0, 30); err != nil {
		t.Fatal(err)
	}
	return w
}

func saved(t testing.TB, w *Window) []byte {
	t.Helper()
	var b bytes.Buffer
	if _, err := w.WriteTo(&b); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

// The saved bytes are a promise: what an earlier build has saved is read by later ones.
func TestSavedFormIsVersionOne(t *testing.T) {
	path := filepath.Join("testdata", "version1.window")
	got := saved(t, small(t))
	if *update {
		if err := os.WriteFile(path, got, 0o644); err != nil {
			t.Fatal(err)
		}
	}
	want, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	if !bytes.Equal(got, want) {
		t.Errorf("%d bytes differ from the %d of %s", len(got), len(want), path)
	}
	w, err := Read(bytes.NewReader(want))
	if err != nil {
		t.Fatal(err)
	}
	if !bytes.Equal(saved(t, w), want) {
		t.Error("what was read is saved as other bytes")
	}
}

func TestEmptyWindowIsSavedAndRead(t *testing.T) {
	w, err := Read(bytes.NewReader(saved(t, must(t, Default()))))
	if err != nil {
		t.Fatal(err)
	}
	add(t, w, 0, 10, 0, 0)
	if n := len(w.View().Rows); n != 10 || w.Policy() != Default() {
		t.Errorf("%d rows under %+v", n, w.Policy())
	}
}

// Whatever byte is changed, wherever the file is cut: it is refused as damaged, and never believed.
func TestDamagedBytesAreRefused(t *testing.T) {
	good := saved(t, small(t))
	bad := make([]byte, len(good))
	step := 1
	if raceDetector {
		step = 7
	}
	for i := 0; i < len(good); i += step {
		for _, mask := range []byte{0xff, 0x01, 0x80} {
			copy(bad, good)
			bad[i] ^= mask
			if _, err := Read(bytes.NewReader(bad)); !errors.Is(err, ErrDamaged) {
				t.Fatalf("byte %d xor %#x: %v", i, mask, err)
			}
		}
		if _, err := Read(bytes.NewReader(good[:i])); !errors.Is(err, ErrDamaged) {
			t.Fatalf("cut at byte %d: %v", i, err)
		}
	}
}

func TestDamageIsNamedWithItsPlace(t *testing.T) {
	good := saved(t, small(t))
	for _, c := range []struct {
		name, want string
		change     func([]byte) []byte
	}{
		{"foreign", `byte 8: it does not begin with "LWWINDOW"`, func(b []byte) []byte { return []byte("PK\x03\x04 and so on") }},
		{"empty", "byte 0: it ends too early", func(b []byte) []byte { return nil }},
		{"later version", "byte 10: it is of version 2, and this program reads version 1",
			func(b []byte) []byte { b[8] = 2; return b }},
		{"cut", "it ends too early", func(b []byte) []byte { return b[:len(b)-1] }},
		{"last byte", "its checksum does not fit", func(b []byte) []byte { b[len(b)-1]++; return b }},
	} {
		_, err := Read(bytes.NewReader(c.change(bytes.Clone(good))))
		if err == nil || !strings.HasPrefix(err.Error(), "not a readable window: ") || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%s: %v, want %q in it", c.name, err, c.want)
		}
	}
}

func TestErrorsOfReaderAndWriterComeThrough(t *testing.T) {
	good := saved(t, small(t))
	if _, err := Read(iotest.TimeoutReader(iotest.OneByteReader(bytes.NewReader(good)))); !errors.Is(err, iotest.ErrTimeout) ||
		errors.Is(err, ErrDamaged) {
		t.Errorf("read: %v", err)
	}
	for n := range 4 { // the buffered writer makes few writes
		full := errors.New("disk full")
		w := &failing{after: n * 200, err: full}
		if got, err := small(t).WriteTo(w); !errors.Is(err, full) || got != int64(w.n) {
			t.Errorf("write: %d bytes, %v", got, err)
		}
	}
}

// failing takes some bytes, then fails.
type failing struct {
	after, n int
	err      error
}

func (f *failing) Write(p []byte) (int, error) {
	n := min(len(p), f.after-f.n)
	f.n += n
	return n, f.err
}

func FuzzRead(f *testing.F) {
	f.Add(saved(f, small(f)))
	f.Add([]byte(magic))
	f.Fuzz(func(t *testing.T, b []byte) {
		w, err := Read(bytes.NewReader(b))
		if err != nil {
			if !errors.Is(err, ErrDamaged) {
				t.Errorf("%v does not wrap ErrDamaged", err)
			}
			return
		}
		w.View() // must not panic on anything that was believed
	})
}
