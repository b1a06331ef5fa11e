package feed

import (
	"bytes"
	"errors"
	"io"
	"testing"
)

// bytesOf is a repeatable text without a short period.
func bytesOf(n int) []byte {
	b := make([]byte, n)
	x := uint32(1)
	for i := range b {
		x = x*1664525 + 1013904223
		b[i] = byte(x >> 24)
	}
	return b
}

func TestEveryByteComesOnceAndInOrder(t *testing.T) {
	for _, size := range []int{0, 1, 1000, first - 1, first, first + 1, 5*first + 17} {
		want := bytesOf(size)
		f := New(bytes.NewReader(want), int64(size), 64<<20)
		var got []byte
		for take := 1; !f.Ended() || len(f.Window()) > 0; take = take*7%70001 + 1 {
			for len(f.Window()) < take && !f.Ended() {
				if err := f.More(); err != nil {
					t.Fatal(err)
				}
			}
			if f.Offset() != int64(len(got)) {
				t.Fatalf("size %d: offset %d after %d bytes", size, f.Offset(), len(got))
			}
			n := min(take, len(f.Window()))
			got = append(got, f.Window()[:n]...)
			f.Skip(n)
		}
		if !bytes.Equal(got, want) {
			t.Errorf("size %d: other bytes", size)
		}
	}
}

func TestWindowGrowsToItsLimitAndNoFurther(t *testing.T) {
	const most = 3 * first
	f := New(bytes.NewReader(bytesOf(5*first)), 5*first, most)
	var err error
	for err == nil {
		err = f.More()
	}
	if !errors.Is(err, ErrTooLong) {
		t.Errorf("got %v", err)
	}
	if len(f.Window()) != most {
		t.Errorf("the window holds %d bytes, want %d", len(f.Window()), most)
	}
	if len(f.buf) > 2*most {
		t.Errorf("the buffer has %d bytes", len(f.buf))
	}
}

func TestAFileThatShrinksIsAnError(t *testing.T) {
	f := New(bytes.NewReader(bytesOf(10)), 20, 100)
	if err := f.More(); !errors.Is(err, io.ErrUnexpectedEOF) {
		t.Errorf("got %v", err)
	}
}

func TestRestartGoesBack(t *testing.T) {
	want := bytesOf(1000)
	f := New(bytes.NewReader(want), 1000, 1000)
	for range 2 {
		if err := f.More(); err != nil {
			t.Fatal(err)
		}
		f.Skip(500)
		if !bytes.Equal(f.Window(), want[500:]) || f.Offset() != 500 {
			t.Error("other bytes after Skip")
		}
		f.Restart(0)
	}
}

func TestALongRowsRoomIsGivenBack(t *testing.T) {
	const size = 40 * first
	f := New(bytes.NewReader(bytesOf(size)), size, size)
	for len(f.Window()) < 30*first {
		if err := f.More(); err != nil {
			t.Fatal(err)
		}
	}
	f.Trim()
	if len(f.buf) < 30*first {
		t.Error("the row is no longer whole")
	}
	f.Skip(len(f.Window()) - 10)
	at := f.Offset()
	f.Trim()
	if len(f.buf) != first || len(f.Window()) != 10 {
		t.Errorf("a buffer of %d bytes with %d in it", len(f.buf), len(f.Window()))
	}
	if err := f.More(); err != nil {
		t.Fatal(err)
	}
	if len(f.buf) != first || f.Offset() != at || !bytes.Equal(f.Window(), bytesOf(size)[at:][:len(f.Window())]) {
		t.Errorf("a buffer of %d bytes at %d, want %d at %d", len(f.buf), f.Offset(), first, at)
	}
}
