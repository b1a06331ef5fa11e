package csv

import (
	"bytes"
	"errors"
	"strings"
	"testing"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
	"github.com/apache/arrow/go/v16/arrow/memory"

	"labelweir/connectors/internal/textrows"
	"labelweir/connectors/table"
)

const tagHeader, tagCells = "weir_score,weir_verdict,weir_implied", `pass,"Gala ""A"", red"`

func TestRowsComeBackByteForByteWithTheirTags(t *testing.T) {
	for _, c := range []struct{ name, text, want string }{
		{"as it is written", apples, "id,diameter,grade,ripe,picked," + tagHeader + "\r\n1,71.50,Gala,true,2026-05-01,0," + tagCells +
			"\r\n2,,\"Fuji, \"\"red\"\"\",False,2026-05-02,0.125," + tagCells + "\r\n3,NA,,true,,0.25," + tagCells + "\r\n"},
		{"needless quotes, blanks and a byte order mark", "\xef\xbb\xbf\"a\", b\n\"1\", 2 ", "\xef\xbb\xbf\"a\", b," + tagHeader + "\n\"1\", 2 ,0," + tagCells + "\n"},
		{"other ends of line in between", "a,b\n1,2\r\n3,4\n", "a,b," + tagHeader + "\n1,2,0," + tagCells + "\r\n3,4,0.125," + tagCells + "\n"},
		{"bytes that are no text", "a,b\n1,\xff\n", "a,b," + tagHeader + "\n1,\xff,0," + tagCells + "\n"},
		{"line end in quotes", "a,b\n1,\"x\r\ny\"\n", "a,b," + tagHeader + "\n1,\"x\r\ny\",0," + tagCells + "\n"},
		{"other delimiter", "a;b\n1,5;2\n", "a;b;" + strings.ReplaceAll(tagHeader, ",", ";") + "\n1,5;2;0;pass;\"Gala \"\"A\"\", red\"\n"},
	} {
		t.Run(c.name, func(t *testing.T) {
			if got := copied(t, c.text, options(t)); got != c.want {
				t.Errorf("got  %q\nwant %q", got, c.want)
			}
		})
	}
}

// The same table goes under three names; a name in .tsv means tabs, whatever is between the input's cells.
func TestNamesOfTabbedFilesGiveTabs(t *testing.T) {
	for _, c := range []struct{ text, name, want string }{
		{"a,b\r\n\"1\",\"x\ty\"\r\n,2\r\n", "out.TSV", "a\tb\r\n1\t\"x\ty\"\r\n\t2\r\n"},
		{"a,b\n1,\"x;\"\"\"\n2,\xff\n", "out.tsv", "a\tb\n1\t\"x;\"\"\"\n2\t\xff\n"},
		{"a,b\n\"1\",x\n", "out.csv", "a,b\n\"1\",x\n"},
		{"a\tb\n\"1\"\tx\n", "out.tsv", "a\tb\n\"1\"\tx\n"},
		{"a\tb\n\"1\"\tx\n", "", "a\tb\n\"1\"\tx\n"},
	} {
		rd := must(open(file(c.text), options(t)))
		var out bytes.Buffer
		w := must(create(&out, rd.Schema(), table.WriteOptions{Name: c.name, Manner: rd.(table.Manner).Manner(), Memory: memory.DefaultAllocator}))
		rec := must(rd.Next())
		if err := errors.Join(w.Write(rec), w.Close()); err != nil || out.String() != c.want {
			t.Errorf("%s of %q: got %q, %v, want %q", c.name, c.text, out.String(), err, c.want)
		}
		rec.Release()
	}
}

func TestASecondFileWithAnotherDelimiterIsWrittenLikeTheFirst(t *testing.T) {
	opt := options(t)
	first := must(open(file("a,b\n1,x\n"), opt))
	schema := first.Schema()
	opt.Like = schema
	second := must(open(file("a;b\n\"2\";\"x,y\"\n3;\n"), opt))
	if !second.Schema().Equal(schema) {
		t.Errorf("got %s, want %s", second.Schema(), schema)
	}
	var out bytes.Buffer
	w := must(create(&out, schema, table.WriteOptions{Manner: first.(table.Manner).Manner(), Memory: memory.DefaultAllocator}))
	for _, rd := range []table.Reader{first, second} {
		rec := must(rd.Next())
		if err := w.Write(rec); err != nil {
			t.Fatal(err)
		}
		rec.Release()
	}
	if err := w.Close(); err != nil {
		t.Fatal(err)
	}
	if want := "a,b\n1,x\n2,\"x,y\"\n3,\n"; out.String() != want {
		t.Errorf("got %q, want %q", out.String(), want)
	}
}

// written is a table as CSV without an input.
func written(t *testing.T, rec arrow.Record) string {
	t.Helper()
	var out bytes.Buffer
	w := must(create(&out, rec.Schema(), table.WriteOptions{Memory: memory.DefaultAllocator}))
	if err := w.Write(rec); err != nil {
		t.Fatal(err)
	}
	if err := w.Close(); err != nil {
		t.Fatal(err)
	}
	return out.String()
}

func TestTablesOfOtherFormats(t *testing.T) {
	schema := arrow.NewSchema([]arrow.Field{{Name: "grade", Type: arrow.BinaryTypes.String, Nullable: true},
		{Name: "a,b", Type: arrow.ListOf(arrow.PrimitiveTypes.Int64), Nullable: true}, {Type: arrow.PrimitiveTypes.Float64, Nullable: true}}, nil)
	rec, _, err := array.RecordFromJSON(memory.DefaultAllocator, schema, strings.NewReader(
		`[{"grade":"Gala","a,b":[1,2],"":0.1},{"grade":"","a,b":null,"":null},{"grade":"x\"y\n","a,b":[],"":1e300}]`))
	if err != nil {
		t.Fatal(err)
	}
	want := "grade,\"a,b\",\"\"\nGala,\"[1,2]\",0.1\n\"\",,\n\"x\"\"y\n\",[],1e+300\n"
	if got := written(t, rec); got != want {
		t.Errorf("got %q, want %q", got, want)
	}
}

func TestOneColumnHasNoBlankLines(t *testing.T) {
	schema := arrow.NewSchema([]arrow.Field{{Name: "a", Type: arrow.BinaryTypes.String, Nullable: true}}, nil)
	rec, _, err := array.RecordFromJSON(memory.DefaultAllocator, schema, strings.NewReader(`[{"a":null},{"a":"x"}]`))
	if err != nil {
		t.Fatal(err)
	}
	if got, want := written(t, rec), "a\n\"\"\nx\n"; got != want {
		t.Errorf("got %q, want %q", got, want)
	}
}

// full is a disk with room for some bytes.
type full int

func (f *full) Write(b []byte) (int, error) {
	if n := int(*f); len(b) > n {
		*f = 0
		return n, errFull
	}
	*f -= full(len(b))
	return len(b), nil
}

var errFull = errors.New("no space left")

func TestAFullDiskIsAnError(t *testing.T) {
	text := "a,b\n" + strings.Repeat("1,abcdefghij\n", 60_000)
	for _, room := range []full{0, textrows.FlushBytes + 1} {
		rd := must(open(file(text), options(t)))
		w := must(create(&room, rd.Schema(), table.WriteOptions{Memory: memory.DefaultAllocator}))
		var err error
		for err == nil {
			rec, end := rd.Next()
			if end != nil {
				break
			}
			err = w.Write(rec)
			rec.Release()
		}
		if end := w.Close(); err == nil {
			err = end
		}
		if !errors.Is(err, errFull) {
			t.Errorf("got %v", err)
		}
	}
}
