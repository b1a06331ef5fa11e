package csv

import (
	"encoding/json"
	"math"
	"math/rand/v2"
	"os"
	"path/filepath"
	"reflect"
	"strconv"
	"strings"
	"testing"
	"time"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
	"github.com/apache/arrow/go/v16/arrow/memory"
)

// The reference is Python's csv module, which writes the files.
func TestCellsAreThoseThatPythonWrote(t *testing.T) {
	var files map[string][][]string
	if err := json.Unmarshal(python(t, "csv", "write.py", t.TempDir()), &files); err != nil {
		t.Fatal(err)
	}
	if len(files) != 7 {
		t.Errorf("%d files", len(files))
	}
	for path, want := range files {
		text := string(must(os.ReadFile(path)))
		types, rows, err := content(t, text, options(t))
		if err != nil {
			t.Fatal(err)
		}
		for _, row := range want {
			for i := range row {
				if row[i] == "" {
					row[i] = "~"
				}
			}
		}
		if !reflect.DeepEqual(rows, want) {
			t.Errorf("%s: other cells", path)
		}
		if want := []string{"id int64", "grade utf8", "note, long utf8", "size float64"}; !reflect.DeepEqual(types, want) {
			t.Errorf("%s: got %q, want %q", path, types, want)
		}
	}
}

// numbersAndWords is a table of values that are hard to write.
func numbersAndWords() arrow.Record {
	r := rand.New(rand.NewPCG(5, 6))
	schema := arrow.NewSchema([]arrow.Field{{Name: "number", Type: arrow.PrimitiveTypes.Float64, Nullable: true},
		{Name: "word", Type: arrow.BinaryTypes.String, Nullable: true}, {Name: "moment", Type: &arrow.TimestampType{Unit: arrow.Microsecond, TimeZone: "UTC"}},
		{Name: "whole", Type: arrow.PrimitiveTypes.Int64}, {Name: "ripe", Type: arrow.FixedWidthTypes.Boolean}}, nil)
	b := array.NewRecordBuilder(memory.DefaultAllocator, schema)
	for i := range 2000 {
		v := math.Float64frombits(r.Uint64())
		if i%5 == 0 || math.IsInf(v, 0) {
			v = math.Round(r.NormFloat64()*1e4) / 1e3
		}
		b.Field(0).(*array.Float64Builder).Append(v)
		word := make([]byte, r.IntN(8))
		for k := range word {
			word[k] = "ab,\"\n\r; "[r.IntN(8)]
		}
		b.Field(1).(*array.StringBuilder).Append("x" + string(word))
		b.Field(2).(*array.TimestampBuilder).Append(arrow.Timestamp(r.Int64N(4e15)))
		b.Field(3).(*array.Int64Builder).Append(r.Int64() - math.MaxInt64/2)
		b.Field(4).(*array.BooleanBuilder).Append(i%3 == 0)
	}
	return b.NewRecord()
}

// The references are Python's csv module and pandas, which read what the writer wrote.
func TestPythonAndPandasReadWhatIsWritten(t *testing.T) {
	rec := numbersAndWords()
	path := filepath.Join(t.TempDir(), "out.csv")
	if err := os.WriteFile(path, []byte(written(t, rec)), 0o600); err != nil {
		t.Fatal(err)
	}
	var got struct {
		Rows    [][]string
		Types   map[string]string
		Numbers []*string
		Moments []string
	}
	if err := json.Unmarshal(python(t, "pandas", "read.py", path), &got); err != nil {
		t.Fatal(err)
	}
	if want := []string{"number", "word", "moment", "whole", "ripe"}; !reflect.DeepEqual(got.Rows[0], want) || len(got.Rows) != 2001 {
		t.Fatalf("got %d rows, header %q", len(got.Rows), got.Rows[0])
	}
	words, numbers := rec.Column(1).(*array.String), rec.Column(0).(*array.Float64)
	for i, row := range got.Rows[1:] {
		if row[1] != words.Value(i) {
			t.Fatalf("row %d: got %q, want %q", i, row[1], words.Value(i))
		}
		want := numbers.Value(i)
		if back, err := strconv.ParseFloat(row[0], 64); err != nil || math.Float64bits(back) != math.Float64bits(want) && !math.IsNaN(want) {
			t.Fatalf("row %d: got %q, want %v", i, row[0], want)
		}
		if got.Numbers[i] != nil {
			near(t, i, *got.Numbers[i], want)
		}
		moment := time.UnixMicro(int64(rec.Column(2).(*array.Timestamp).Value(i))).UTC()
		if back, err := time.Parse("2006-01-02 15:04:05.999999Z07:00", got.Moments[i]); err != nil || !back.Equal(moment) {
			t.Fatalf("row %d: got %s, want %s", i, got.Moments[i], moment)
		}
	}
	if got.Types["number"] != "float64" || got.Types["whole"] != "int64" || got.Types["ripe"] != "bool" {
		t.Errorf("pandas infers %v", got.Types)
	}
}

// near: pandas' own quick reader of numbers may be off in the last place.
func near(t *testing.T, row int, hex string, want float64) {
	t.Helper()
	v, err := strconv.ParseFloat(strings.Replace(hex, "0x0.0p+0", "0x0p+0", 1), 64)
	if err != nil || math.Abs(v-want) > 1e-14*math.Abs(want) {
		t.Fatalf("row %d: pandas reads %s, want %v", row, hex, want)
	}
}
