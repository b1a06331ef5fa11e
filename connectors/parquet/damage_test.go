package parquet

import (
	"errors"
	"math/rand/v2"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"labelweir/connectors/table"
	"labelweir/filter"
)

// survive reads bytes as a file and copies them; it may fail, but only with an Error that says so.
func survive(t *testing.T, dir string, b []byte, label string) (failed bool) {
	t.Helper()
	path := filepath.Join(dir, "damaged.parquet")
	if err := os.WriteFile(path, b, 0o644); err != nil {
		t.Fatal(err)
	}
	err := carry(path, filepath.Join(dir, "out.parquet"), filter.Record{Label: label}, options())
	var own *table.Error
	if err != nil && (!errors.As(err, &own) || own.Path == "") {
		t.Errorf("got %T %v, want an Error", err, err)
	}
	return err != nil
}

func TestDamagedFilesGiveErrorsNotPanics(t *testing.T) {
	for _, name := range []string{"apples.parquet", "types.parquet", "plain.parquet", "grows.parquet"} {
		t.Run(name, func(t *testing.T) {
			whole, err := os.ReadFile("testdata/" + name)
			if err != nil {
				t.Fatal(err)
			}
			r := rand.New(rand.NewPCG(5, uint64(len(name))))
			dir, failed := t.TempDir(), 0
			for range 150 {
				b := append([]byte(nil), whole...)
				switch r.IntN(4) {
				case 0:
					b = b[:r.IntN(len(b))]
				case 1:
					at := r.IntN(len(b) - 8)
					for i := range 4 {
						b[at+i] = 0xFF
					}
				default:
					for range 1 + r.IntN(3) {
						b[r.IntN(len(b))] ^= 1 << r.IntN(8)
					}
				}
				if survive(t, dir, b, labels[strings.TrimSuffix(name, ".parquet")]) {
					failed++
				}
			}
			if failed < 40 {
				t.Errorf("only %d of 150 damaged files were noticed", failed)
			}
		})
	}
}

func TestLengthsInTheFooterAreBelievedOnlyWhenTheyFit(t *testing.T) {
	for _, x := range []struct {
		about string
		b     []byte
		ok    bool
	}{
		{"an empty struct", []byte{0}, true},
		{"a list of a thousand million structs", []byte{0x19, 0xFC, 0x80, 0x94, 0xEB, 0xDC, 0x03, 0}, false},
		{"text longer than the rest", []byte{0x18, 0x7F, 'a', 0}, false},
		{"a number without end", []byte{0x16, 0xFF, 0xFF}, false},
		{"structs within structs", []byte(strings.Repeat("\x1C", 70)), false},
		{"no end", []byte{0x16, 0x02}, false},
		{"an unknown type", []byte{0x1E, 0}, false},
	} {
		if err := (&walker{b: x.b}).fields(); (err == nil) != x.ok {
			t.Errorf("%s: got %v", x.about, err)
		}
	}
}
