package arrowfile

import (
	"context"
	"errors"
	"io"
	"math/rand/v2"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"labelweir/connectors/table"
	"labelweir/filter"
)

// survive reads bytes as a file and copies them through a sink; it may fail, but only with an Error that says so.
func survive(t *testing.T, path string, b []byte, label string) {
	t.Helper()
	if err := os.WriteFile(path, b, 0o644); err != nil {
		t.Fatal(err)
	}
	check := func(err error) {
		t.Helper()
		var own *table.Error
		if err != nil && err != io.EOF && (!errors.As(err, &own) || own.Path == "") {
			t.Errorf("got %T %v, want an Error", err, err)
		}
	}
	src, err := Open(path, filter.Record{Label: label}, table.Options{Rows: 7})
	if err != nil {
		check(err)
		return
	}
	defer src.Close()
	out := table.OutputPaths{Tagged: path + ".tagged", Quarantine: path + ".held"}
	sink, err := create(lazy{}, out, src, table.Options{Replace: true})
	if err != nil {
		check(err)
		return
	}
	defer sink.Close()
	for {
		b, err := src.Next(context.Background())
		if err != nil {
			check(err)
			break
		}
		err = sink.Deliver(context.Background(), b, tagsOf(b, tagOf))
		b.Release()
		if err != nil {
			check(err)
			return
		}
	}
	check(sink.Commit(context.Background()))
}

var damageFiles = map[string]string{"apples.arrow": "grade", "apples.arrows": "grade", "types.arrow": "label", "types.arrows": "label",
	"unions.arrow": "label", "grows.arrow": "label", "replaced.arrows": "label", "apples_v4.arrows": "grade"}

func TestDamagedFilesGiveErrorsNotPanics(t *testing.T) {
	for name, label := range damageFiles {
		t.Run(name, func(t *testing.T) {
			whole, err := os.ReadFile("testdata/" + name)
			if err != nil {
				t.Fatal(err)
			}
			path := filepath.Join(t.TempDir(), "damaged")
			r := rand.New(rand.NewPCG(3, uint64(len(name))))
			for range 150 {
				b := append([]byte(nil), whole...)
				switch r.IntN(5) {
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
				survive(t, path, b, label)
			}
		})
	}
}

func FuzzOpen(f *testing.F) {
	for name := range damageFiles {
		b, err := os.ReadFile("testdata/" + name)
		if err != nil {
			f.Fatal(err)
		}
		f.Add(b, "label")
		f.Add(b, "grade")
	}
	damaged, err := filepath.Glob("../testdata/damaged/*.arrow*")
	if err != nil || len(damaged) == 0 {
		f.Fatalf("no damaged seeds: %v", err)
	}
	for _, name := range damaged {
		b, err := os.ReadFile(name)
		if err != nil {
			f.Fatal(err)
		}
		label, _, _ := strings.Cut(filepath.Base(name), "_")
		f.Add(b, label)
	}
	f.Fuzz(func(t *testing.T, b []byte, label string) {
		survive(t, filepath.Join(t.TempDir(), "in"), b, label)
	})
}
