package csv

import (
	"bytes"
	"errors"
	"io"
	"math/rand/v2"
	"strings"
	"testing"

	"github.com/apache/arrow/go/v16/arrow/array"
	"github.com/apache/arrow/go/v16/arrow/memory"

	"labelweir/connectors/table"
)

// endless takes away what ends lines.
func endless(b []byte) string {
	return strings.NewReplacer("\n", "", "\r", "").Replace(string(b))
}

// nothingLost reads any bytes and checks that each stands in the header, in a row or in an unreadable row, in order.
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
	rd, err := open(table.File{ReaderAt: bytes.NewReader(b), Path: "apples.csv", Size: int64(len(b))}, opt)
	if err != nil {
		if !errors.Is(err, table.ErrUnreadable) {
			t.Fatal(err)
		}
		return
	}
	got.Write(rd.(table.Manner).Manner().(manner).header)
	for {
		rec, err := rd.Next()
		if err == io.EOF {
			break
		}
		if err != nil {
			t.Fatalf("%q: %v", b, err)
		}
		got.Write(rec.Column(int(rec.NumCols()) - 1).(*array.Binary).Value(0))
		rec.Release()
	}
	if !long && endless(got.Bytes()) != endless(b) {
		t.Fatalf("%q: got %q", b, got.Bytes())
	}
}

func FuzzReader(f *testing.F) {
	for _, s := range []string{apples, "a;grade\n1;x\n2\n\"", "\xef\xbb\xbfgrade|b\r\n\"x\"|\"y\"\"\"\r\n", "a,grade\n1,\xff\n\n2,\"x\ny\"z\n3,w"} {
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
	whole := []byte(strings.Repeat(apples[strings.IndexByte(apples, '\n')+1:], 10))
	whole = append([]byte(apples), whole...)
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
		nothingLost(t, b, 30)
	}
}
