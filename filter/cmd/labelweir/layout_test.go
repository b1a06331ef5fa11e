package main

import (
	"bytes"
	"encoding/json"
	"errors"
	"os"
	"runtime"
	"strconv"
	"strings"
	"testing"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
	"github.com/apache/arrow/go/v16/arrow/ipc"

	"labelweir/filter/cmd/labelweir/internal/demo"
)

// TestNeitherCoresNorLayoutShow sweeps the same rows cut into record batches in several ways, on several numbers of cores
// and goroutines: every output has the same bytes, but for the times in the report.
func TestNeitherCoresNorLayoutShow(t *testing.T) {
	if testing.Short() {
		t.Skip("trains several models")
	}
	whole := t.TempDir() + "/line.arrow"
	if err := demo.Grow(400, 1).WriteLine(whole); err != nil {
		t.Fatal(err)
	}
	for name, flags := range map[string][]string{
		"sampled": {"-c", "weir.yaml"}, // a window of a few rows of the file
		"sliding": {"--window", "150", "--retrain", "80%", "--hold", "50"},
	} {
		t.Run(name, func(t *testing.T) {
			var want map[string][]byte
			for _, c := range []struct {
				cores int
				sizes []int64 // of record batches, in turn
			}{{2, []int64{400}}, {1, []int64{1, 64, 7}}, {4, []int64{250}}} {
				got := sweepCut(t, whole, c.cores, c.sizes, flags)
				if want == nil {
					want = got
				}
				for file := range want {
					if !bytes.Equal(got[file], want[file]) {
						t.Errorf("on %d cores, with batches of %v, %s differs", c.cores, c.sizes, file)
					}
				}
			}
			if len(want["held.arrow"]) == 0 || len(want["last.weir"]) == 0 {
				t.Error("a file to compare is empty")
			}
		})
	}
}

// sweepCut cuts a file into record batches of these sizes, sweeps it in this process, and gives the outputs.
func sweepCut(t *testing.T, whole string, cores int, sizes []int64, flags []string) map[string][]byte {
	t.Helper()
	t.Chdir(t.TempDir())
	if err := recut(whole, "line.arrow", sizes); err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile("weir.yaml", []byte("window: {records: 150}\n"), 0o666); err != nil {
		t.Fatal(err)
	}
	defer runtime.GOMAXPROCS(runtime.GOMAXPROCS(cores))
	var said bytes.Buffer
	p := &process{out: &output{w: &said}, err: &said, environ: func() []string { return nil }}
	args := append([]string{"sweep", "line.arrow", "--label", "grade", "--source", "grader", "--mode", "divert", "--budget", "50%",
		"--workers", strconv.Itoa(cores), "--out", "tagged.arrow", "--quarantine", "held.arrow", "--report", "report.json",
		"--snapshot", "last.weir"}, flags...)
	if code := run(t.Context(), p, args); code != 0 {
		t.Fatalf("ended with %d: %s", code, said.String())
	}
	files := map[string][]byte{}
	for _, name := range strings.Fields("tagged.arrow held.arrow report.json last.weir") {
		text, err := os.ReadFile(name)
		if err != nil {
			t.Fatal(err)
		}
		files[name] = text
	}
	var report map[string]any
	if err := json.Unmarshal(files["report.json"], &report); err != nil || report["times"] == nil {
		t.Fatalf("the report has no times: %v", err)
	}
	delete(report, "times")
	text, err := json.Marshal(report)
	if err != nil {
		t.Fatal(err)
	}
	files["report.json"] = text
	return files
}

// recut copies an Arrow file of one record batch, cutting its rows into batches of these sizes in turn.
func recut(from, to string, sizes []int64) (err error) {
	in, err := os.Open(from)
	if err != nil {
		return err
	}
	defer in.Close()
	r, err := ipc.NewFileReader(in)
	if err != nil {
		return err
	}
	defer r.Close()
	out, err := os.Create(to)
	if err != nil {
		return err
	}
	defer func() { err = errors.Join(err, out.Close()) }()
	w, err := ipc.NewFileWriter(out, ipc.WithSchema(r.Schema()))
	if err != nil {
		return err
	}
	table, err := tableOf(r)
	if err != nil {
		return err
	}
	defer table.Release()
	rows := array.NewTableReader(table, table.NumRows())
	defer rows.Release()
	for rows.Next() {
		all := rows.Record()
		for at, k := int64(0), 0; at < all.NumRows(); k++ {
			end := min(all.NumRows(), at+sizes[k%len(sizes)])
			part := all.NewSlice(at, end)
			err := w.Write(part)
			part.Release()
			if err != nil {
				return err
			}
			at = end
		}
	}
	return w.Close()
}

func tableOf(r *ipc.FileReader) (arrow.Table, error) {
	var records []arrow.Record
	for i := range r.NumRecords() {
		rec, err := r.RecordAt(i)
		if err != nil {
			return nil, err
		}
		defer rec.Release()
		records = append(records, rec)
	}
	return array.NewTableFromRecords(r.Schema(), records), nil
}
