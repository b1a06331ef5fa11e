package term

import (
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"
)

func TestFilesPipesAndTheNullDeviceAreNoTerminals(t *testing.T) {
	file, err := os.Create(filepath.Join(t.TempDir(), "file"))
	if err != nil {
		t.Fatal(err)
	}
	defer file.Close()
	r, w, err := os.Pipe()
	if err != nil {
		t.Fatal(err)
	}
	defer r.Close()
	defer w.Close()
	null, err := os.OpenFile(os.DevNull, os.O_WRONLY, 0)
	if err != nil {
		t.Fatal(err)
	}
	defer null.Close()
	for _, f := range []*os.File{file, w, null} {
		if Is(f) {
			t.Errorf("%s passes for a terminal", f.Name())
		}
	}
}

// clock gives a time that moves on by step at each look.
func clock(step time.Duration) func() time.Time {
	t := time.Date(2026, 9, 14, 6, 0, 0, 0, time.UTC)
	return func() time.Time { t = t.Add(step); return t }
}

func TestBarShowsHowFarAPhaseIs(t *testing.T) {
	var out strings.Builder
	b := NewBar(&out, clock(time.Second))
	b.Show("read", 7, 0)
	b.Show("score", 1, 2)
	b.Show("score", 9, 2)
	b.Clear()
	want := "\r\x1b[Kread             7" +
		"\r\x1b[Kscore            ████████████░░░░░░░░░░░░  50 %" +
		"\r\x1b[Kscore            ████████████████████████ 100 %" +
		"\r\x1b[K"
	if out.String() != want {
		t.Errorf("got %q\nwant %q", out.String(), want)
	}
}

func TestBarSkipsWhatComesTooFastButNeitherANewPhaseNorTheEnd(t *testing.T) {
	var out strings.Builder
	b := NewBar(&out, clock(time.Millisecond))
	for i := range int64(1000) {
		b.Show("score", i+1, 1000)
	}
	b.Show("write", 1, 1000)
	if n := strings.Count(out.String(), "\r"); n < 10 || n > 13 {
		t.Errorf("drawn %d times", n)
	}
	if !strings.Contains(out.String(), "100 %") || !strings.Contains(out.String(), "write") {
		t.Errorf("the end or the new phase is missing in %q", out.String())
	}
}

func TestClearLeavesAnUntouchedLineAlone(t *testing.T) {
	var out strings.Builder
	NewBar(&out, time.Now).Clear()
	var none *Bar
	none.Show("score", 1, 2)
	none.Clear()
	if out.Len() != 0 {
		t.Errorf("wrote %q", out.String())
	}
}
