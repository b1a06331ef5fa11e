package arrowfile

import (
	"context"
	"encoding/binary"
	"errors"
	"os"
	"path/filepath"
	"testing"

	"labelweir/connectors/table"
	"labelweir/filter"
)

// Each buffer of each record batch in turn is said to begin beyond its message; the error names the batch and a
// column, which follow each other as the buffers do.
func TestTheColumnAtFaultIsNamed(t *testing.T) {
	for name, label := range map[string]string{"types.arrow": "label", "unions.arrow": "label", "apples.arrow": "grade", "apples_v4.arrow": "grade"} {
		t.Run(name, func(t *testing.T) {
			whole, err := os.ReadFile("testdata/" + name)
			if err != nil {
				t.Fatal(err)
			}
			src := open(t, "testdata/"+name, filter.Record{Label: label}, counted(t))
			columns := map[string]int{} // counted from 1
			for i, c := range src.Choice() {
				columns[c.Column] = i + 1
			}
			m, err := newMessages(table.File{ReaderAt: bytesAt(whole)}, int64(len(whole)))
			if err != nil {
				t.Fatal(err)
			}
			named := map[string]bool{}
			for k, bl := range m.recs {
				meta, body, err := m.readMeta(bl.off)
				if err != nil {
					t.Fatal(err)
				}
				rec, _ := fbRoot(meta).table(2)
				pos, n := rec.vector(2)
				at := int(body) - len(meta) + pos // of the first buffer in the file
				last := 0
				for i := range n {
					if binary.LittleEndian.Uint64(rec.b[pos+16*i+8:]) == 0 {
						continue
					}
					b := append([]byte(nil), whole...)
					binary.LittleEndian.PutUint64(b[at+16*i:], 1<<40)
					e := faultOf(t, b, label)
					if e == nil || e.Batch != k+1 || columns[e.Column] == 0 {
						t.Errorf("record batch %d, buffer %d: got %v", k+1, i, e)
						continue
					}
					named[e.Column] = true
					if now := columns[e.Column]; now < last {
						t.Errorf("record batch %d, buffer %d: column %q comes before that of the buffer before", k+1, i, e.Column)
					} else {
						last = now
					}
				}
			}
			if len(named) < len(columns)*3/4 {
				t.Errorf("only %d of %d columns were ever at fault", len(named), len(columns))
			}
		})
	}
}

type bytesAt []byte

func (b bytesAt) ReadAt(p []byte, off int64) (int, error) {
	n := copy(p, b[min(off, int64(len(b))):])
	if n < len(p) {
		return n, os.ErrInvalid
	}
	return n, nil
}

// faultOf reads bytes as a file and gives the error.
func faultOf(t *testing.T, b []byte, label string) *table.Error {
	t.Helper()
	path := filepath.Join(t.TempDir(), "in.arrow")
	if err := os.WriteFile(path, b, 0o644); err != nil {
		t.Fatal(err)
	}
	src, err := Open(path, filter.Record{Label: label}, table.Options{})
	var e *table.Error
	for err == nil {
		var batch *filter.Batch
		if batch, err = src.Next(context.Background()); err == nil {
			batch.Release()
		}
	}
	if src != nil {
		src.Close()
	}
	errors.As(err, &e)
	return e
}
