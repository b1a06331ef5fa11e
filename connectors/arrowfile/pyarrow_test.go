package arrowfile

import (
	"encoding/json"
	"fmt"
	"math"
	"os"
	"os/exec"
	"path/filepath"
	"testing"

	"labelweir/filter"
	"labelweir/model"
)

// python runs a script of testdata and gives what it prints. Without pyarrow the test is skipped, under CI it fails.
func python(t testing.TB, script string, args ...string) []byte {
	t.Helper()
	if out, err := exec.Command("python3", "-c", "import pyarrow").CombinedOutput(); err != nil {
		if os.Getenv("CI") != "" {
			t.Fatalf("python3 with pyarrow is needed: %v\n%s", err, out)
		}
		t.Skip("python3 with pyarrow is needed: pip install pyarrow")
	}
	cmd := exec.Command("python3", append([]string{filepath.Join("testdata", script)}, args...)...)
	cmd.Stderr = os.Stderr
	out, err := cmd.Output()
	if err != nil {
		t.Fatalf("%s %v: %v", script, args, err)
	}
	return out
}

// Apache's own Python reader (C++ underneath) tells what stands in each row.
func TestValuesAreThosePyarrowReads(t *testing.T) {
	files := []struct {
		file string
		rec  filter.Record
	}{
		{"apples.arrow", appleRecord}, {"apples.arrows", appleRecord}, {"apples_v4.arrow", appleRecord},
		{"types.arrow", filter.Record{Label: "label"}}, {"types.arrows", filter.Record{Label: "label"}},
		{"unions.arrow", filter.Record{Label: "label"}}, {"grows.arrow", filter.Record{Label: "label"}},
		{"grows.arrows", filter.Record{Label: "label"}}, {"replaced.arrows", filter.Record{Label: "label"}},
	}
	var paths []string
	for _, x := range files {
		paths = append(paths, "testdata/"+x.file)
	}
	var wants [][]map[string]any
	if err := json.Unmarshal(python(t, "values.py", paths...), &wants); err != nil {
		t.Fatal(err)
	}
	for k, x := range files {
		t.Run(x.file, func(t *testing.T) {
			path, want := paths[k], wants[k]
			rows := 0
			each(t, open(t, path, x.rec, counted(t)), func(b *filter.Batch) {
				for i := range b.Rows() {
					sameRow(t, b, i, x.rec, want[rows])
					rows++
				}
			})
			if rows != len(want) {
				t.Errorf("got %d rows, want %d", rows, len(want))
			}
		})
	}
}

// sameRow compares row i of a batch with what pyarrow read.
func sameRow(t *testing.T, b *filter.Batch, i int, rec filter.Record, want map[string]any) {
	t.Helper()
	tab := b.Table
	check := func(name string, got any) {
		t.Helper()
		w := want[name]
		if _, text := got.(string); text && w != nil {
			w = fmt.Sprint(w)
		}
		if fmt.Sprint(got) != fmt.Sprint(w) {
			t.Errorf("row %d: %s: got %v, want %v", b.First+int64(i), name, got, w)
		}
	}
	check(rec.Label, named(tab.Labels[i], tab.Classes))
	if rec.Source != "" {
		check(rec.Source, named(tab.Sources[i], tab.SourceNames))
	}
	if rec.Time != "" {
		var got any
		if b.Times[i] != filter.NoTime {
			got = float64(b.Times[i])
		}
		check(rec.Time, got)
	}
	for _, c := range tab.Columns {
		switch c.Kind {
		case model.Category:
			check(c.Name, named(c.Codes[i], c.Levels))
		case model.Number:
			check(c.Name, numbered(want[c.Name], c.Values[i]))
		case model.Vector:
			check(c.Name, vector(want[c.Name], c.Values[i*c.Size:(i+1)*c.Size]))
		}
	}
}

func named(code int32, names []string) any {
	if code < 0 {
		return nil
	}
	return names[code]
}

// numbered is v as it comes out of JSON; booleans, where pyarrow has them, from 0 and 1.
func numbered(like any, v float64) any {
	if math.IsNaN(v) {
		return nil
	}
	if _, ok := like.(bool); ok {
		return v == 1
	}
	return v
}

// vector is a list as it comes out of JSON, nil when all of it is missing and pyarrow has no list.
func vector(like any, vs []float64) any {
	out, none := make([]any, len(vs)), true
	for i, v := range vs {
		out[i] = numbered(0, v)
		none = none && out[i] == nil
	}
	if none && like == nil {
		return nil
	}
	return out
}

func TestPyarrowReadsWhatIsWritten(t *testing.T) {
	var jobs []string
	for _, file := range []string{"apples.arrow", "apples.arrows", "apples_v4.arrow", "apples_v4.arrows", "types.arrow", "types.arrows",
		"unions.arrow", "grows.arrow", "grows.arrows", "replaced.arrows", "no_rows.arrow", "no_batches.arrow", "no_batches.arrows"} {
		for _, rows := range []int{1, 5, 4096} {
			t.Run(fmt.Sprintf("%s in batches of %d", file, rows), func(t *testing.T) {
				in := "testdata/" + file
				rec := filter.Record{Label: "label"}
				if file[0] == 'a' || file[0] == 'n' {
					rec = appleRecord
				}
				opt := counted(t)
				opt.Rows = rows
				out := outIn(t, filepath.Ext(file))
				var tags []filter.Tag
				src := open(t, in, rec, opt)
				copyFile(t, src, out, opt, func(row int64) filter.Tag {
					tags = append(tags, tagOf(row))
					return tagOf(row)
				})
				jobs = append(jobs, in, kept(t, out.Tagged), kept(t, out.Quarantine), tagsFile(t, tags))
			})
		}
	}
	defer func() {
		for i, path := range jobs {
			if i%4 != 0 {
				os.Remove(path)
			}
		}
	}()
	if diff := python(t, "compare.py", jobs...); len(diff) > 0 {
		t.Errorf("%s", diff)
	}
}

// kept moves a file out of a subtest's folder.
func kept(t *testing.T, path string) string {
	f, err := os.CreateTemp("", "arrowfile-*"+filepath.Ext(path))
	if err != nil {
		t.Fatal(err)
	}
	f.Close()
	if err := os.Rename(path, f.Name()); err != nil {
		t.Fatal(err)
	}
	return f.Name()
}

// tagsFile writes tags for compare.py.
func tagsFile(t *testing.T, tags []filter.Tag) string {
	list := []map[string]any{}
	for _, tag := range tags {
		m := map[string]any{"Score": nil, "Margin": nil, "Implied": tag.Implied, "Snapshot": tag.Snapshot,
			"Verdict": tag.Verdict.String(), "Reason": tag.Reason.String(), "Divert": tag.Divert}
		if tag.Verdict != filter.Unscored {
			m["Score"], m["Margin"] = tag.Score, tag.Margin
		}
		list = append(list, m)
	}
	b, err := json.Marshal(list)
	if err != nil {
		t.Fatal(err)
	}
	path := filepath.Join(t.TempDir(), "tags.json")
	if err := os.WriteFile(path, b, 0o644); err != nil {
		t.Fatal(err)
	}
	return kept(t, path)
}
