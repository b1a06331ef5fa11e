package jsonlines

import (
	"errors"
	"fmt"
	"reflect"
	"strings"
	"testing"

	"github.com/apache/arrow/go/v16/arrow"

	"labelweir/connectors/internal/textrows"
	"labelweir/connectors/table"
)

const apples = `{"grade":"Gala","size":71.50,"n":1,"ripe":true,"at":"2026-05-01T07:30:00Z","red":[0.1,2],"box":{"no":7},"tags":["a"]}
{"n":2, "grade" : "F\u00fcji \"x\"", "red":[3,null], "new":5}
{"grade":null,"size":-0,"n":12345678901234567,"ripe":false,"at":null,"box":"none","tags":[]}
`

func TestTypesAndValues(t *testing.T) {
	types, rows, err := content(t, apples, options(t))
	if err != nil {
		t.Fatal(err)
	}
	wantTypes := []string{"grade utf8", "size float64", "n int64", "ripe bool", "at timestamp[us, tz=UTC]", "red fixed_size_list<item: float64, nullable>[2]",
		"box struct<>", "tags list<item: null, nullable>", "new int64"}
	if !reflect.DeepEqual(types, wantTypes) {
		t.Errorf("got %q, want %q", types, wantTypes)
	}
	want := [][]string{
		{"Gala", "71.50", "1", "true", "2026-05-01T07:30:00Z", "[0.1,2]", `{"no":7}`, `["a"]`, "~"},
		{`Füji "x"`, "~", "2", "~", "~", `[3,"NaN"]`, "~", "~", "5"},
		{"~", "-0", "12345678901234567", "false", "~", "~", `"none"`, "[]", "~"},
	}
	if !reflect.DeepEqual(rows, want) {
		t.Errorf("got %q, want %q", rows, want)
	}
}

func TestLinesThatCantBeReadAreSetAsideAndTheRestGoesOn(t *testing.T) {
	text := `{"grade":"x","v":[1,2]}
{"grade":"y"
 [1]

{"grade":"y","grade":"z"}
{"q":1,"grade":"z","\u0071":2}
{"grade":["y"],"v":[1,2]}
{"grade":"y","v":[1,2,3]}
{"grade":"y","v":"no"}
{"grade":"y","v":[1,"2"]}
` + "{\"grade\":\"\xff\"}\n" + `{"grade":7,"v":null}`
	var aside asided
	opt := options(t)
	opt.Unreadable, opt.Text, opt.Peek = aside.take, []string{"grade"}, 1
	_, rows, err := content(t, text, opt)
	if err != nil {
		t.Fatal(err)
	}
	if want := [][]string{{"x", "[1,2]"}, {"7", "~"}}; !reflect.DeepEqual(rows, want) {
		t.Errorf("got %q, want %q", rows, want)
	}
	want := asided{
		`line 2 byte 24 {"grade":"y": the line ends too early, at byte 13 of the line`,
		`line 3 byte 37  [1]: the line is no object, at byte 2 of the line`,
		`line 5 byte 43 {"grade":"y","grade":"z"}: repeats the member "grade", at byte 14 of the line`,
		`line 6 byte 69 {"q":1,"grade":"z","\u0071":2}: repeats the member "q", at byte 20 of the line`,
		`line 7 byte 100 {"grade":["y"],"v":[1,2]}: has an array where "grade" should have a name or number, at byte 10 of the line`,
		`line 8 byte 126 {"grade":"y","v":[1,2,3]}: has 3 numbers in the array "v", not 2, at byte 18 of the line`,
		`line 9 byte 152 {"grade":"y","v":"no"}: has text where "v" should have 2 numbers, at byte 18 of the line`,
		`line 10 byte 175 {"grade":"y","v":[1,"2"]}: has more than numbers in the array "v", at byte 18 of the line`,
		"line 11 byte 201 {\"grade\":\"\xff\"}: the bytes are not UTF-8 text, at byte 11 of the line",
	}
	if !reflect.DeepEqual(aside, want) {
		t.Errorf("got\n%s\nwant\n%s", strings.Join(aside, "\n"), strings.Join(want, "\n"))
	}
}

func TestALineThatCantBeReadIsAnErrorWhenNobodyTakesIt(t *testing.T) {
	_, _, err := content(t, "{\"a\":1}\n{\"a\":}\n", options(t))
	const want = `apples.jsonl: line 2: the line can't be read: no value begins like this, at byte 6 of the line; mend the line, or name an output for unreadable rows`
	if !errors.Is(err, table.ErrUnreadable) || err.Error() != want {
		t.Errorf("got %v\nwant %s", err, want)
	}
}

func TestKindsThatMix(t *testing.T) {
	for _, c := range []struct{ lines, want string }{
		{`{"a":1} {"a":2.5}`, "a float64"},
		{`{"a":1} {"a":"2"}`, "a utf8"},
		{`{"a":true} {"a":0}`, "a utf8"},
		{`{"a":"1"} {"a":"2"}`, "a utf8"},
		{`{"a":null} {"b":1}`, "a utf8"},
		{`{"a":[1]} {"a":[1,2]}`, "a list<item: null, nullable>"},
		{`{"a":[1]} {"a":2}`, "a list<item: null, nullable>"},
		{`{"a":[1]} {"a":{}}`, "a struct<>"},
		{`{"a":"2026-05-01"} {"a":"x"}`, "a utf8"},
		{`{"a":1e999}`, "a float64"},
	} {
		types, _, err := content(t, strings.ReplaceAll(c.lines, "} {", "}\n{"), options(t))
		if err != nil || types[0] != c.want {
			t.Errorf("%s: got %q %v, want %s", c.lines, types, err, c.want)
		}
	}
}

func TestFilesThatAreNoJSONLines(t *testing.T) {
	for _, c := range []struct{ text, want string }{
		{"", "apples.jsonl: has no lines; check the step that wrote it"},
		{" \n\r\n", "apples.jsonl: has no lines; check the step that wrote it"},
		{"[\n{\"a\":1}]", "apples.jsonl: the first line can't be read: the line ends too early, at byte 2 of the line; write one JSON object on each line (jq -c '.[]' makes lines of an array)"},
		{"\xff\xfe{\x00", "apples.jsonl: is UTF-16 text, not UTF-8; convert it to UTF-8 first"},
		{"\x1f\x8b\x00", "apples.jsonl: is compressed by gzip; unpack it first"},
	} {
		if _, err := open(file(c.text), options(t)); err == nil || err.Error() != c.want || !errors.Is(err, table.ErrUnreadable) {
			t.Errorf("%q: got %v, want %s", c.text, err, c.want)
		}
	}
}

func TestLongLinesAreSetAsideInBoundedMemory(t *testing.T) {
	long := `{"a":"` + strings.Repeat("x", 3000) + `"}`
	var aside asided
	opt := options(t)
	opt.Unreadable, opt.MostRow = aside.take, 1000
	_, rows, err := content(t, "{\"a\":\"y\"}\n"+long+"\n{\"a\":\"z\"}", opt)
	if want := [][]string{{"y"}, {"z"}}; err != nil || !reflect.DeepEqual(rows, want) {
		t.Errorf("got %q %v, want %q", rows, err, want)
	}
	if want := "line 2 byte 10 " + long[:1000] + ": has more than 1000 bytes; the rest of the line is left out"; len(aside) != 1 || aside[0] != want {
		t.Errorf("got %q, want %q", aside, want)
	}
}

func TestColumnsCanBeTakenFromTheFirstFile(t *testing.T) {
	opt := options(t)
	opt.Like = must(open(file(apples), opt)).Schema()
	rd := must(open(file(`{"other":1,"n":"x"}`), opt))
	if !rd.Schema().Equal(opt.Like) {
		t.Errorf("got %s, want %s", rd.Schema(), opt.Like)
	}
}

func TestBatchSizesChangeNothing(t *testing.T) {
	text := strings.Repeat("{\"a\":1,\"v\":[1]}\n{\"a\":2,\"v\":[]}\n{\"v\":[2],\"b\":\"x\"}\n", 500)
	var first [][]string
	var firstAside asided
	for _, n := range []int{4096, 1, 7, 100} {
		var aside asided
		opt := options(t)
		opt.Rows, opt.Unreadable, opt.Peek = n, aside.take, 1
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
	rd := must(open(file("{\"a\":1}\n\n{\"a\":2}\n"), opt))
	for _, want := range []struct{ line, done int64 }{{1, 8}, {3, 17}} {
		rec := must(rd.Next())
		rec.Release()
		done, size := rd.Progress()
		if rd.Place().Line != want.line || done != want.done || size != 17 {
			t.Errorf("line %d, %d of %d bytes, want %+v", rd.Place().Line, done, size, want)
		}
	}
}

// A few bytes a line must not cost megabytes: here 5,000 columns, and a vector of 500,000 numbers of which there is room
// for two.
func TestRecordBatchesOfManyValuesHaveFewRows(t *testing.T) {
	var wide strings.Builder
	for i := range 5_000 {
		fmt.Fprintf(&wide, ",\"m%d\":1", i)
	}
	long := "[1" + strings.Repeat(",2", 499_999) + "]"
	text := "{" + wide.String()[1:] + `,"a":` + long + `,"b":` + long + `,"c":` + long + "}\n" + strings.Repeat("{}\n", 20)
	rd := must(open(file(text), options(t)))
	if got := rd.Schema().Field(5_002).Type.String(); got != "list<item: null, nullable>" {
		t.Errorf("the third vector is %s", got)
	}
	rows := int64(0)
	if err := each(t, rd, func(rec arrow.Record) {
		if rows += rec.NumRows(); rec.NumRows()*rec.NumCols() > textrows.BatchValues {
			t.Fatalf("%d rows of %d columns", rec.NumRows(), rec.NumCols())
		}
		if rec.NumRows() > 4 {
			t.Fatalf("%d rows of vectors with 1,000,000 numbers", rec.NumRows())
		}
	}); err != nil || rows != 21 {
		t.Errorf("%d rows, %v", rows, err)
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
	text := strings.Repeat("{\"a\":1}\n", 100_000)
	opt := options(t)
	opt.Peek = 10
	rd := must(open(table.File{ReaderAt: broken{text, 300_000}, Path: "apples.jsonl", Size: int64(len(text))}, opt))
	err := each(t, rd, func(arrow.Record) {})
	if want := "apples.jsonl: line 32769: can't be read: input/output error"; !errors.Is(err, errBroken) || !errors.Is(err, table.ErrUnreadable) || err == nil || err.Error() != want {
		t.Errorf("got %v, want %s", err, want)
	}
	if _, err := open(table.File{ReaderAt: broken{text, 0}, Path: "apples.jsonl", Size: int64(len(text))}, opt); !errors.Is(err, errBroken) {
		t.Errorf("got %v", err)
	}
}
