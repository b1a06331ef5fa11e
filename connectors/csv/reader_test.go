package csv

import (
	"errors"
	"reflect"
	"strings"
	"testing"

	"github.com/apache/arrow/go/v16/arrow"

	"labelweir/connectors/table"
)

const apples = "id,diameter,grade,ripe,picked\r\n1,71.50,Gala,true,2026-05-01\r\n2,,\"Fuji, \"\"red\"\"\",False,2026-05-02\r\n3,NA,,true,\r\n"

func TestTypesAndCells(t *testing.T) {
	types, rows, err := content(t, apples, options(t))
	if err != nil {
		t.Fatal(err)
	}
	if want := []string{"id int64", "diameter float64", "grade utf8", "ripe bool", "picked timestamp[us]"}; !reflect.DeepEqual(types, want) {
		t.Errorf("got %q, want %q", types, want)
	}
	want := [][]string{{"1", "71.50", "Gala", "true", "2026-05-01"}, {"2", "~", `Fuji, "red"`, "False", "2026-05-02"}, {"3", "NA", "~", "true", "~"}}
	if !reflect.DeepEqual(rows, want) {
		t.Errorf("got %q, want %q", rows, want)
	}
}

func TestRowsThatCantBeReadAreSetAsideAndTheRestGoesOn(t *testing.T) {
	text := "a,grade\n1,x\n2\n3,y,z\n\n\"4\"5,z\n6,\"v\nw\"\n7,\xff\n8,\"open\n9,u\n"
	var aside asided
	opt := options(t)
	opt.Unreadable, opt.Text = aside.take, []string{"grade"}
	_, rows, err := content(t, text, opt)
	if err != nil {
		t.Fatal(err)
	}
	if want := [][]string{{"1", "x"}, {"6", "v\nw"}, {"9", "u"}}; !reflect.DeepEqual(rows, want) {
		t.Errorf("got %q, want %q", rows, want)
	}
	want := asided{
		`apples.csv line 3 byte 12 "2": has 1 cell, the header has 2`,
		`apples.csv line 4 byte 14 "3,y,z": has 3 cells, the header has 2`,
		`apples.csv line 6 byte 21 "\"4\"5,z": cell 1 has text behind its closing quote`,
		`apples.csv line 9 byte 36 "7,\xff": cell 2, "grade", is not UTF-8 text`,
		`apples.csv line 10 byte 40 "8,\"open": cell 2 opens a quote that is never closed`,
	}
	if !reflect.DeepEqual(aside, want) {
		t.Errorf("got %s\nwant %s", strings.Join(aside, "\n"), strings.Join(want, "\n"))
	}
}

func TestARowThatCantBeReadIsAnErrorWhenNobodyTakesIt(t *testing.T) {
	_, _, err := content(t, "a,b\n1,2\n3\n", options(t))
	const want = `apples.csv: line 3: the row can't be read: has 1 cell, the header has 2; mend the row, or name an output for unreadable rows`
	if !errors.Is(err, table.ErrUnreadable) || err.Error() != want {
		t.Errorf("got %v\nwant %s", err, want)
	}
}

func TestTheTakersErrorEndsTheReading(t *testing.T) {
	full := errors.New("disk full")
	opt := options(t)
	opt.Unreadable = func(table.Unreadable) error { return full }
	rd := must(open(file("a,b\n1\n2,3\n"), opt))
	for range 2 {
		if _, err := rd.Next(); !errors.Is(err, full) {
			t.Errorf("got %v", err)
		}
	}
}

func TestLongRowsAreSetAsideInBoundedMemory(t *testing.T) {
	long := strings.Repeat("x", 3000)
	text := "a,b\n1,2\n3," + long + "\n4,\"" + strings.Repeat("y\n", 900) + "z\n5,6\n"
	var aside asided
	opt := options(t)
	opt.Unreadable, opt.MostRow = aside.take, 1000
	_, rows, err := content(t, text, opt)
	if err != nil {
		t.Fatal(err)
	}
	if want := [][]string{{"1", "2"}, {"5", "6"}}; !reflect.DeepEqual(rows, want) {
		t.Errorf("got %q, want %q", rows, want)
	}
	if want := `apples.csv line 3 byte 8 "3,` + long[:998] + `": has more than 1000 bytes; the rest of the line is left out`; aside[0] != want {
		t.Errorf("got %s, want %s", aside[0], want)
	}
	if want := `apples.csv line 4 byte 3011 "4,\"y": opens a quote that is not closed within 1000 bytes`; aside[1] != want {
		t.Errorf("got %s, want %s", aside[1], want)
	}
	if n := 2 + 900; len(aside) != n {
		t.Errorf("%d rows set aside, want %d", len(aside), n)
	}
}

func TestDelimiters(t *testing.T) {
	for _, c := range []struct {
		text, want string
		given      byte
	}{
		{"a;b;c\n1,5;2;3\n", "a|b|c", 0},
		{"a\tb\n1,5\t2\n", "a|b", 0},
		{"a|b\n1|2\n", "a|b", 0},
		{"a,b;c\n1,2\n3,4\n", "a|b;c", 0},
		{"a\n1\n", "a", 0},
		{"a,b\n1,2\n", "a,b", ';'},
		{"\"a;b\",c\n\"1;2\",3\n", "a;b|c", 0},
		{"\xef\xbb\xbfa;b\n1;2\n", "a|b", 0},
	} {
		opt := options(t)
		opt.Delimiter = c.given
		var names []string
		for _, f := range must(open(file(c.text), opt)).Schema().Fields() {
			names = append(names, f.Name)
		}
		if got := strings.Join(names[:len(names)-1], "|"); got != c.want {
			t.Errorf("%q: got %s, want %s", c.text, got, c.want)
		}
	}
}

func TestFilesThatAreNoCSV(t *testing.T) {
	for _, c := range []struct{ text, want string }{
		{"", "apples.csv: line 1: has no rows, not even a header; check the step that wrote it"},
		{"\n\n", "apples.csv: line 3: has no rows, not even a header; check the step that wrote it"},
		{"\xff\xfea\x00", "apples.csv: is UTF-16 text, not UTF-8; convert it to UTF-8 first"},
		{"a,\x00\n", "apples.csv: has zero bytes, so it is no text; convert it to CSV text in UTF-8 first"},
		{"a,\"b\n", "apples.csv: line 1: the header can't be read: cell 2 opens a quote that is never closed; write the names of the columns into the first row"},
		{"a,b,c\n1;2\n3;4\n", `apples.csv: line 2: no row behind the header can be read; this one has 1 cell, the header has 3; check that "," is the delimiter`},
		{"a,\xff\n", "apples.csv: line 1: the name of column 2 is not UTF-8 text; convert the file to UTF-8"},
	} {
		if _, err := open(file(c.text), options(t)); err == nil || err.Error() != c.want || !errors.Is(err, table.ErrUnreadable) {
			t.Errorf("%q: got %v, want %s", c.text, err, c.want)
		}
	}
}

func TestAColumnWhoseFirstCellsAreNoTextHoldsBytes(t *testing.T) {
	types, rows, err := content(t, "a,b\n1,\xff\xfe\n2,x\n", options(t))
	if err != nil || types[1] != "b binary" || rows[0][1] != "\xff\xfe" {
		t.Errorf("got %q %q %v", types, rows, err)
	}
}

func TestTypesCanBeTakenFromTheFirstFile(t *testing.T) {
	opt := options(t)
	opt.Like = must(open(file("a,b,a\n1,x,2.5\n"), opt)).Schema()
	types, _, err := content(t, "a,b,a,c\nq,1,r,7\n", opt)
	if want := []string{"a int64", "b utf8", "a float64", "c int64"}; err != nil || !reflect.DeepEqual(types, want) {
		t.Errorf("got %q %v, want %q", types, err, want)
	}
}

func TestBatchSizesChangeNothing(t *testing.T) {
	text := "a,b\n" + strings.Repeat("1,x\n2\n3,\"y\n\"\n", 500)
	var first [][]string
	var firstAside asided
	for _, n := range []int{4096, 1, 7, 100} {
		var aside asided
		opt := options(t)
		opt.Rows, opt.Unreadable = n, aside.take
		_, rows, err := content(t, text, opt)
		if err != nil {
			t.Fatal(err)
		}
		if first == nil {
			first, firstAside = rows, aside
		}
		if !reflect.DeepEqual(rows, first) || !reflect.DeepEqual(aside, firstAside) || len(rows) != 1000 || len(aside) != 500 {
			t.Errorf("batches of %d: %d rows, %d set aside", n, len(rows), len(aside))
		}
	}
}

func TestPlaceAndProgress(t *testing.T) {
	opt := options(t)
	opt.Rows = 1
	rd := must(open(file("a,b\n\n1,\"2\n\"\n3,4\n"), opt))
	for _, want := range []struct{ line, done int64 }{{3, 12}, {5, 16}} {
		rec := must(rd.Next())
		rec.Release()
		done, size := rd.Progress()
		if rd.Place().Line != want.line || done != want.done || size != 16 {
			t.Errorf("line %d, %d of %d bytes, want %+v", rd.Place().Line, done, size, want)
		}
	}
}

// broken is a file that can be read up to a byte, and no further.
type broken struct {
	text string
	upTo int64
}

var errBroken = errors.New("input/output error")

func (b broken) ReadAt(p []byte, at int64) (int, error) {
	if at+int64(len(p)) > b.upTo {
		return copy(p, b.text[min(at, b.upTo):b.upTo]), errBroken
	}
	return copy(p, b.text[at:]), nil
}

func TestAFaultOfTheDiskIsAnErrorWithItsLine(t *testing.T) {
	text := "a,b\n" + strings.Repeat("1,2\n", 200_000)
	opt := options(t)
	opt.Peek = 10
	rd := must(open(table.File{ReaderAt: broken{text, 300_000}, Path: "apples.csv", Size: int64(len(text))}, opt))
	var err error
	for err == nil {
		var rec arrow.Record
		if rec, err = rd.Next(); err == nil {
			rec.Release()
		}
	}
	if want := "apples.csv: line 65538: can't be read: input/output error"; !errors.Is(err, errBroken) || !errors.Is(err, table.ErrUnreadable) || err.Error() != want {
		t.Errorf("got %v, want %s", err, want)
	}
	if _, err := open(table.File{ReaderAt: broken{text, 0}, Path: "apples.csv", Size: int64(len(text))}, opt); !errors.Is(err, errBroken) {
		t.Errorf("got %v", err)
	}
}
