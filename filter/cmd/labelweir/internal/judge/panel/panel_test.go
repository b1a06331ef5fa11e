package panel

import (
	"math"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
	"github.com/apache/arrow/go/v16/arrow/ipc"
	"github.com/apache/arrow/go/v16/arrow/memory"

	"labelweir/model"
)

// writeFile writes one batch of rows, given as JSON, under the fields.
func writeFile(t *testing.T, path string, fields []arrow.Field, rows string) {
	t.Helper()
	schema := arrow.NewSchema(fields, nil)
	rec, _, err := array.RecordFromJSON(memory.DefaultAllocator, schema, strings.NewReader(rows))
	if err != nil {
		t.Fatal(err)
	}
	f, err := os.Create(path)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	w, err := ipc.NewFileWriter(f, ipc.WithSchema(schema))
	if err != nil {
		t.Fatal(err)
	}
	for _, part := range []arrow.Record{rec.NewSlice(0, 2), rec.NewSlice(2, rec.NumRows())} {
		if err := w.Write(part); err != nil {
			t.Fatal(err)
		}
	}
	if err := w.Close(); err != nil {
		t.Fatal(err)
	}
}

// crates writes a panel of one table with four rows, three of them noted wrongly by plan p with seed 1.
func crates(t *testing.T, noiseIDs [4]string) string {
	t.Helper()
	dir := t.TempDir()
	text := &arrow.DictionaryType{IndexType: arrow.PrimitiveTypes.Int8, ValueType: arrow.BinaryTypes.String}
	id := arrow.Field{Name: "id", Type: arrow.PrimitiveTypes.Int64}
	writeFile(t, filepath.Join(dir, "crates.arrow"), []arrow.Field{id,
		{Name: "weight", Type: arrow.PrimitiveTypes.Float32, Nullable: true},
		{Name: "colour", Type: text, Nullable: true},
		{Name: "label", Type: arrow.BinaryTypes.String},
	}, `[{"id":0,"weight":1.5,"colour":"red","label":"first"},{"id":1,"weight":null,"colour":"green","label":"second"},
	 {"id":2,"weight":2,"colour":null,"label":"third"},{"id":3,"weight":3,"colour":"red","label":"first"}]`)
	rows := `[{"id":A,"p.1.label":"second","p.1.flipped":true,"p.1.source":"s2"},{"id":B,"p.1.label":"first","p.1.flipped":true,"p.1.source":"s1"},
	 {"id":C,"p.1.label":"second","p.1.flipped":true,"p.1.source":"s2"},{"id":D,"p.1.label":"first","p.1.flipped":false,"p.1.source":"s1"}]`
	for i, name := range []string{"A", "B", "C", "D"} {
		rows = strings.Replace(rows, `"id":`+name, `"id":`+noiseIDs[i], 1)
	}
	writeFile(t, filepath.Join(dir, "crates.noise.arrow"), []arrow.Field{id, {Name: "p.1.label", Type: text},
		{Name: "p.1.flipped", Type: arrow.FixedWidthTypes.Boolean}, {Name: "p.1.source", Type: text}}, rows)
	return dir
}

func TestCaseHoldsWhatTheFilesSay(t *testing.T) {
	dir := crates(t, [4]string{"0", "1", "2", "3"})
	names, err := Names(dir)
	if err != nil || !slices.Equal(names, []string{"crates"}) {
		t.Fatalf("Names = %v, %v", names, err)
	}
	table, err := Open(dir, "crates")
	if err != nil {
		t.Fatal(err)
	}
	c, err := table.Case(Cell{"p", 1})
	if err != nil {
		t.Fatal(err)
	}
	in := c.Input
	if len(in.Columns) != 2 {
		t.Fatalf("%d columns, want weight and colour", len(in.Columns))
	}
	weight, colour := in.Columns[0], in.Columns[1]
	if weight.Kind != model.Number || weight.Values[0] != 1.5 || !math.IsNaN(weight.Values[1]) || weight.Values[3] != 3 {
		t.Errorf("weight = %+v", weight)
	}
	if colour.Kind != model.Category || !slices.Equal(colour.Codes, []int32{0, 1, -1, 0}) || !slices.Equal(colour.Levels, []string{"red", "green"}) {
		t.Errorf("colour = %+v", colour)
	}
	if !slices.Equal(in.Labels, []int32{0, 1, 0, 1}) || !slices.Equal(in.Classes, []string{"second", "first"}) {
		t.Errorf("labels = %v of %v", in.Labels, in.Classes)
	}
	if !slices.Equal(in.Sources, []int32{0, 1, 0, 1}) || !slices.Equal(in.SourceNames, []string{"s2", "s1"}) {
		t.Errorf("sources = %v of %v", in.Sources, in.SourceNames)
	}
	if !slices.Equal(c.Wrong, []bool{true, true, true, false}) || c.Share != 0.75 {
		t.Errorf("wrong = %v, share %v", c.Wrong, c.Share)
	}
	if !slices.Equal(c.Truth, []int32{1, 0, -1, 1}) { // third is nowhere an observed label
		t.Errorf("truth = %v", c.Truth)
	}
	if in.Keys[3] != model.Key(3) {
		t.Errorf("key of row 3 = %x, want %x", in.Keys[3], model.Key(3))
	}
}

func TestFilesOfDifferentRowsAreRefused(t *testing.T) {
	if _, err := Open(crates(t, [4]string{"0", "2", "1", "3"}), "crates"); err == nil || !strings.Contains(err.Error(), "same rows") {
		t.Errorf("error = %v, want one about the rows", err)
	}
}

func TestUnknownCellIsAnError(t *testing.T) {
	table, err := Open(crates(t, [4]string{"0", "1", "2", "3"}), "crates")
	if err != nil {
		t.Fatal(err)
	}
	if _, err := table.Case(Cell{"p", 2}); err == nil {
		t.Error("no error for a seed that is not there")
	}
}

// Sizes are those that scikit-learn and modeldata state for these tables.
func TestCommittedPanelReadsWhole(t *testing.T) {
	dir := "../../../../../../testdata/panel"
	names, err := Names(dir)
	if err != nil || !slices.Equal(names, []string{"credit", "digits", "wdbc", "wine"}) {
		t.Fatalf("Names = %v, %v", names, err)
	}
	base, err := ReadBaselines(filepath.Join(dir, "baselines.tsv"))
	if err != nil {
		t.Fatal(err)
	}
	want := map[string][3]int{"credit": {4454, 13, 2}, "digits": {1797, 64, 10}, "wdbc": {569, 30, 2}, "wine": {178, 13, 3}}
	for _, name := range names {
		table, err := Open(dir, name)
		if err != nil {
			t.Fatal(err)
		}
		share := 0.0
		for seed := range 3 {
			c, err := table.Case(Cell{"uniform10", seed})
			if err != nil {
				t.Fatal(err)
			}
			if got := [3]int{c.Input.Rows(), len(c.Input.Columns), len(c.Input.Classes)}; got != want[name] {
				t.Errorf("%s: rows, columns, classes = %v, want %v", name, got, want[name])
			}
			share += c.Share / 3
			for i := range c.Wrong {
				if c.Wrong[i] != (c.Truth[i] != c.Input.Labels[i]) {
					t.Fatalf("%s: row %d: flipped disagrees with the labels", name, i)
				}
			}
		}
		if share < 0.08 || share > 0.12 {
			t.Errorf("%s: planted share %v, want about 0.1", name, share)
		}
		if n := slices.IndexFunc(base, func(b Baseline) bool { return b.Table == name && b.Plan == "uniform10" && b.Best }); n < 0 {
			t.Errorf("%s: no best baseline", name)
		}
	}
}
