package jsonlines

import (
	"bytes"
	"encoding/json"
	"errors"
	"math/rand/v2"
	"strings"
	"testing"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
	"github.com/apache/arrow/go/v16/arrow/memory"

	"labelweir/connectors/internal/textrows"
	"labelweir/connectors/table"
)

// nothingLost reads any bytes and checks that each stands in a line read or an unreadable one, in order, and that what
// is written of the lines read is JSON again.
func nothingLost(t *testing.T, b []byte, mostRow int) {
	t.Helper()
	var got bytes.Buffer
	long := false
	opt := table.ReadOptions{Rows: 1, Peek: 3, MostRow: mostRow, Memory: memory.NewGoAllocator(), Text: []string{"grade"}}
	opt.Unreadable = func(u table.Unreadable) error {
		if !bytes.HasPrefix(b[u.Byte:], u.Bytes) || u.Reason == "" || u.Line != int64(1+bytes.Count(b[:u.Byte], []byte{'\n'})) {
			t.Fatalf("%q: line %d, byte %d: %q: %s", b, u.Line, u.Byte, u.Bytes, u.Reason)
		}
		long = long || strings.Contains(u.Reason, "left out")
		got.Write(u.Bytes)
		return nil
	}
	rd, err := open(table.File{ReaderAt: bytes.NewReader(b), Path: "apples.jsonl", Size: int64(len(b))}, opt)
	if err != nil {
		if !errors.Is(err, table.ErrUnreadable) {
			t.Fatal(err)
		}
		return
	}
	var out bytes.Buffer
	w := must(create(&out, rd.Schema(), table.WriteOptions{Memory: memory.NewGoAllocator()}))
	err = each(t, rd, func(rec arrow.Record) {
		got.Write(rec.Column(int(rec.NumCols()) - 1).(*array.Binary).Value(0))
		composed(t, rec)
		if err := w.Write(rec); err != nil {
			t.Fatal(err)
		}
	})
	if err = errors.Join(err, w.Close()); err != nil {
		t.Fatalf("%q: %v", b, err)
	}
	for _, line := range bytes.Split(bytes.TrimSuffix(out.Bytes(), []byte("\n")), []byte("\n")) {
		if len(line) > 0 && !json.Valid(line) {
			t.Fatalf("%q: wrote %q", b, line)
		}
	}
	if !long && blankless(got.Bytes()) != blankless(bytes.TrimPrefix(b, []byte(textrows.ByteOrderMark))) {
		t.Fatalf("%q: got %q", b, got.Bytes())
	}
}

// composed checks that a record batch without the lines' bytes becomes valid JSON.
func composed(t *testing.T, rec arrow.Record) {
	t.Helper()
	n := int(rec.NumCols()) - 1
	schema := arrow.NewSchema(rec.Schema().Fields()[:n], nil)
	part := array.NewRecord(schema, rec.Columns()[:n], rec.NumRows())
	defer part.Release()
	var out bytes.Buffer
	w := must(create(&out, schema, table.WriteOptions{Memory: memory.NewGoAllocator()}))
	if err := errors.Join(w.Write(part), w.Close()); err != nil || !json.Valid(out.Bytes()) {
		t.Fatalf("%v: %q", err, out.Bytes())
	}
}

// blankless takes away what may stand on a blank line.
func blankless(b []byte) string {
	return strings.NewReplacer("\n", "", "\r", "", " ", "", "\t", "").Replace(string(b))
}

func FuzzReader(f *testing.F) {
	for _, s := range []string{apples, "{\"grade\":[1]}\n{}\n{\"a\":1}", "\xef\xbb\xbf{\"a\":[1,2]}\r\n{\"a\":[1]}", "{\"a\":{}}\n{\"a\":\"x\"}\n{\"a\":1,\"a\":2}"} {
		f.Add([]byte(s), false)
	}
	f.Fuzz(func(t *testing.T, b []byte, narrow bool) {
		mostRow := 1 << 20
		if narrow {
			mostRow = 20
		}
		nothingLost(t, b, mostRow)
	})
}

// Damage of every kind: bits flipped, pieces left out, repeated or put elsewhere.
func TestDamagedFilesLoseNothing(t *testing.T) {
	r := rand.New(rand.NewPCG(7, 8))
	whole := []byte(strings.Repeat(apples, 5))
	for range 1_000 {
		b := bytes.Clone(whole)
		for range 1 + r.IntN(4) {
			i, n := r.IntN(len(b)-20), 1+r.IntN(20)
			switch r.IntN(4) {
			case 0:
				b[i] ^= 1 << r.IntN(8)
			case 1:
				b = append(b[:i], b[i+n:]...)
			case 2:
				b = append(b[:i+n], b[i:]...)
			case 3:
				copy(b[i:], b[r.IntN(len(b)-20):][:n])
			}
		}
		nothingLost(t, b, 1<<20)
		nothingLost(t, b, 100)
	}
}
