package jsonlines

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

func TestLinesComeBackByteForByteWithTheirTags(t *testing.T) {
	for _, c := range []struct{ name, text, want string }{
		{"members, spaces and escapes", "{ \"a\" : 1.50, \"late\":{\"x\":[]} }\n{\"b\":\"\\u00e4\"}",
			"{ \"a\" : 1.50, \"late\":{\"x\":[]} ,\"weir_score\":0,\"weir_implied\":\"Gala \\\"A\\\"\"}\n{\"b\":\"\\u00e4\",\"weir_score\":0.125,\"weir_implied\":null}\n"},
		{"CR LF and blank lines", "{\"a\":1}\r\n\r\n{\"a\":2} \r\n", "{\"a\":1,\"weir_score\":0,\"weir_implied\":\"Gala \\\"A\\\"\"}\r\n{\"a\":2,\"weir_score\":0.125,\"weir_implied\":null} \r\n"},
		{"byte order mark and an empty object", "\xef\xbb\xbf{ }", "\xef\xbb\xbf{ \"weir_score\":0,\"weir_implied\":\"Gala \\\"A\\\"\"}\n"},
	} {
		t.Run(c.name, func(t *testing.T) {
			if got := copied(t, c.text, options(t)); got != c.want {
				t.Errorf("got  %q\nwant %q", got, c.want)
			}
		})
	}
}

func TestMembersThatCameLateAreKept(t *testing.T) {
	opt := options(t)
	opt.Peek = 1
	got := copied(t, "{\"a\":1}\n{\"a\":2,\"late\":[1,{}]}\n", opt)
	if want := "{\"a\":2,\"late\":[1,{}],\"weir_score\":0.125,\"weir_implied\":null}\n"; !strings.HasSuffix(got, want) {
		t.Errorf("got %q, want %q", got, want)
	}
}

func TestTablesOfOtherFormats(t *testing.T) {
	cells := table.NewCellType(arrow.PrimitiveTypes.Float64)
	schema := arrow.NewSchema([]arrow.Field{{Name: "grade", Type: arrow.BinaryTypes.String, Nullable: true}, {Name: "a\"b", Type: arrow.ListOf(arrow.PrimitiveTypes.Int64), Nullable: true},
		{Name: "grade", Type: cells, Nullable: true}}, nil)
	text, _, err := array.FromJSON(memory.DefaultAllocator, arrow.BinaryTypes.String, strings.NewReader(`["Gala", null, "\u0001"]`))
	if err != nil {
		t.Fatal(err)
	}
	lists, _, err := array.FromJSON(memory.DefaultAllocator, schema.Field(1).Type, strings.NewReader(`[[1, 2], null, []]`))
	if err != nil {
		t.Fatal(err)
	}
	numbers, _, err := array.FromJSON(memory.DefaultAllocator, arrow.BinaryTypes.String, strings.NewReader(`["1.50", null, "NA"]`))
	if err != nil {
		t.Fatal(err)
	}
	rec := array.NewRecord(schema, []arrow.Array{text, lists, array.NewExtensionArrayWithStorage(cells, numbers)}, 3)
	var out bytes.Buffer
	w := must(create(&out, schema, table.WriteOptions{Memory: memory.DefaultAllocator}))
	if err := errors.Join(w.Write(rec), w.Close()); err != nil {
		t.Fatal(err)
	}
	want := `{"grade":"Gala","a\"b":[1,2],"grade#2":1.50}` + "\n" + `{"grade":null,"a\"b":null,"grade#2":null}` + "\n" + `{"grade":"\u0001","a\"b":[],"grade#2":"NA"}` + "\n"
	if out.String() != want {
		t.Errorf("got %s, want %s", out.String(), want)
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
	text := strings.Repeat("{\"a\":1,\"b\":\"abcdefghij\"}\n", 30_000)
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
