package panel

import (
	"math"
	"os"
	"path/filepath"
	"testing"
)

func TestBestFigureOfAStream(t *testing.T) {
	dir := t.TempDir()
	if err := os.Mkdir(filepath.Join(dir, "streams"), 0o777); err != nil {
		t.Fatal(err)
	}
	text := "stream\tmethod\tap_all\tece\tprec95\tshare95\nline\ta\t0.5\t0.1\t0.96\t0.02\nline\tb\t0.7\t0.2\t0.80\t0.08\n" +
		"other\ta\t0.9\t0.0\tNA\tNA\n"
	if err := os.WriteFile(filepath.Join(dir, "streams", "baselines.tsv"), []byte(text), 0o666); err != nil {
		t.Fatal(err)
	}
	base, err := ReadStreamBaselines(dir)
	if err != nil {
		t.Fatal(err)
	}
	for _, x := range []struct {
		stream, figure, method string
		value                  float64
	}{
		{"line", "ap_all", "b", 0.7}, {"line", "ece", "a", 0.1}, {"line", "share95", "a", 0.02}, // b is wrong about one in five
		{"other", "share95", "", math.NaN()}, {"line", "ap_pre", "", math.NaN()},
	} {
		v, method := BestFigure(base, x.stream, x.figure)
		if method != x.method || v != x.value && !(math.IsNaN(v) && math.IsNaN(x.value)) {
			t.Errorf("%s %s: %v by %q, want %v by %q", x.stream, x.figure, v, method, x.value, x.method)
		}
	}
}

func TestFolderWithoutStreamsIsAnError(t *testing.T) {
	if _, err := StreamNames(t.TempDir()); err == nil {
		t.Error("no error")
	}
	if _, err := OpenStream(t.TempDir(), "none"); err == nil {
		t.Error("no error for a stream that is not there")
	}
}
