package chain

import (
	"bytes"
	"encoding/binary"
	"encoding/json"
	"os"
	"path/filepath"
	"testing"
)

// Writes the benchmarks' matrix for testdata/liblinear.py, where LABELWEIR_MATRIX says, else to a place that goes away.
func TestWriteEncodedMatrix(t *testing.T) {
	path := os.Getenv("LABELWEIR_MATRIX")
	rows := benchRows
	if path == "" {
		path, rows = filepath.Join(t.TempDir(), "matrix"), 500
	}
	p := encoded(rows, .1, newRand(1))
	write := func(suffix string, v any) {
		var b bytes.Buffer
		if err := binary.Write(&b, binary.LittleEndian, v); err != nil {
			t.Fatal(err)
		}
		if err := os.WriteFile(path+suffix, b.Bytes(), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	write(".x", p.X)
	write(".leaves", p.Leaves)
	write(".y", p.Y)
	meta, err := json.Marshal(map[string]any{"n": p.N, "dense": p.Dense, "trees": p.Trees,
		"leaf_cols": p.LeafCols, "leaf_value": p.LeafValue, "lambda": p.Lambda})
	if err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(path+".json", meta, 0o644); err != nil {
		t.Fatal(err)
	}
	for suffix, want := range map[string]int{".x": 4 * rows * p.Dense, ".leaves": 4 * rows * p.Trees, ".y": rows} {
		if info, err := os.Stat(path + suffix); err != nil || info.Size() != int64(want) {
			t.Errorf("%s: %v bytes (%v), want %d", suffix, info, err, want)
		}
	}
}
