package main

import (
	"bytes"
	"context"
	"fmt"
	"io"
	"math"
	"math/rand/v2"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
	"github.com/apache/arrow/go/v16/arrow/ipc"
	"github.com/apache/arrow/go/v16/arrow/memory"

	"labelweir/filter"
	"labelweir/filter/cmd/labelweir/internal/judge/panel"
)

// line writes a panel with one stream of n apples, every tenth graded wrongly, and a baseline for it.
func line(t *testing.T, n int) string {
	t.Helper()
	dir := t.TempDir()
	if err := os.Mkdir(filepath.Join(dir, "streams"), 0o777); err != nil {
		t.Fatal(err)
	}
	text := &arrow.DictionaryType{IndexType: arrow.PrimitiveTypes.Int8, ValueType: arrow.BinaryTypes.String}
	schema := arrow.NewSchema([]arrow.Field{
		{Name: "id", Type: arrow.PrimitiveTypes.Int64}, {Name: "diameter", Type: arrow.PrimitiveTypes.Float32},
		{Name: "cultivar", Type: text}, {Name: "source", Type: text}, {Name: "label", Type: text},
		{Name: "truth_label", Type: text}, {Name: "truth_flipped", Type: arrow.FixedWidthTypes.Boolean},
		{Name: "truth_rate", Type: arrow.PrimitiveTypes.Float32},
	}, nil)
	rng := rand.New(rand.NewPCG(5, 5))
	var rows strings.Builder
	for i := range n {
		grade, wrong := rng.IntN(2), i%10 == 3
		noted := grade
		if wrong {
			noted = 1 - grade
		}
		names := [2]string{"cull", "first"}
		fmt.Fprintf(&rows, `,{"id":%d,"diameter":%g,"cultivar":"c%d","source":"s%d","label":%q,"truth_label":%q,"truth_flipped":%t,"truth_rate":0.1}`,
			i, 60+20*float64(grade)+rng.NormFloat64(), rng.IntN(3), rng.IntN(2), names[noted], names[grade], wrong)
	}
	rec, _, err := array.RecordFromJSON(memory.DefaultAllocator, schema, strings.NewReader("["+rows.String()[1:]+"]"))
	if err != nil {
		t.Fatal(err)
	}
	f, err := os.Create(filepath.Join(dir, "streams", "line.arrow"))
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	w, err := ipc.NewFileWriter(f, ipc.WithSchema(schema))
	if err != nil {
		t.Fatal(err)
	}
	if err := w.Write(rec); err != nil {
		t.Fatal(err)
	}
	if err := w.Close(); err != nil {
		t.Fatal(err)
	}
	base := "stream\tmethod\tap_all\tece\nline\tweak\t0.5\t0.4\nline\tstrong\t0.9\tNA\n"
	if err := os.WriteFile(filepath.Join(dir, "streams", "baselines.tsv"), []byte(base), 0o666); err != nil {
		t.Fatal(err)
	}
	return dir
}

// Every tenth grade was made wrong, far from the line between the classes; the rows are judged as they arrive.
func TestStreamIsGoneThroughAsItArrives(t *testing.T) {
	dir := line(t, 900)
	s, err := parse([]string{dir, "--streams", "--window", "300", "--retrain", "0.7", "--procs", "1"}, io.Discard)
	if err != nil {
		t.Fatal(err)
	}
	s.sliding.rows = dir
	s.sliding.bounds = bounds{first: 300, turn: 500, settled: 700}
	streams, err := runStreams(context.Background(), s, t.Output())
	if err != nil {
		t.Fatal(err)
	}
	f := &streams[0]
	if len(streams) != 1 || f.err != nil {
		t.Fatal(f.line())
	}
	for k, ap := range f.parts {
		if !(ap > 0.9) {
			t.Errorf("average precision of part %d is %v, want at least 0.9", k, ap)
		}
	}
	if f.rows != 600 || f.unscored != 0 || !(f.calibration.Error() < 0.1) || !(f.foldAP > 0.9) {
		t.Errorf("%d rows, %d unscored, calibration error %v, average precision out of fold %v",
			f.rows, f.unscored, f.calibration.Error(), f.foldAP)
	}
	if f.trained.cold != 1 || f.trained.warm != 2 || f.report.Retrains.Warm != 2 { // after rows 300, 510 and 720
		t.Errorf("%d cold and %d warm fits, want 1 and 2; the report says %+v", f.trained.cold, f.trained.warm, f.report.Retrains)
	}
	base, err := panel.ReadStreamBaselines(dir)
	if err != nil {
		t.Fatal(err)
	}
	var out bytes.Buffer
	if err := reportStreams(&out, streams, base); err != nil {
		t.Fatal(err)
	}
	for _, want := range []string{"strong", "ahead", "weak"} {
		if !strings.Contains(out.String(), want) {
			t.Errorf("no %q in\n%s", want, out.String())
		}
	}
	rows, err := panel.ReadTSV(filepath.Join(dir, "line.tsv"))
	if err != nil || len(rows) != 900 || rows[3]["wrong"] != "true" || rows[3]["score"] == "NA" || rows[4]["verdict"] != "pass" {
		t.Errorf("%d rows written, %v", len(rows), err)
	}
	path := filepath.Join(dir, "out.tsv")
	if err := writeStreams(path, streams); err != nil {
		t.Fatal(err)
	}
	if lines, err := panel.ReadTSV(path); err != nil || len(lines) != 1 || panel.Number(lines[0]["warm"]) != 2 {
		t.Errorf("read back %v, %v", lines, err)
	}
}

func TestTruthIsNotFed(t *testing.T) {
	s, err := panel.OpenStream(line(t, 20), "line")
	if err != nil {
		t.Fatal(err)
	}
	var fed []string
	for _, f := range s.Record.Fields {
		fed = append(fed, f.Path)
	}
	if !slices.Equal(fed, []string{"diameter", "cultivar"}) || s.Record.Label != "label" || s.Record.Source != "source" {
		t.Errorf("fed: %v, label %q, source %q", fed, s.Record.Label, s.Record.Source)
	}
	if len(s.Wrong) != 20 || !s.Wrong[3] || !s.Wrong[13] || s.Wrong[4] {
		t.Errorf("wrong: %v", s.Wrong)
	}
}

// By hand: of the rows from 2 on, scores .96 (wrong), none (wrong), .2, .97; parts 2–3, 4, 5.
func TestStreamFiguresByHand(t *testing.T) {
	nan := math.NaN()
	var list []filter.Tag
	for _, p := range []float64{nan, 1, 0.96, nan, 0.2, 0.97} {
		tag := filter.Tag{Score: p}
		if p == 0.97 {
			tag.Verdict, tag.Divert = filter.Quarantine, true
		} else if p == 0.96 {
			tag.Verdict = filter.Quarantine
		}
		list = append(list, tag)
	}
	var f streamFigures
	f.measure(bounds{2, 4, 5}, []bool{true, true, true, true, false, false}, list, []float64{1, 1, 0.9, 1, 0.1, nan})
	// all: .97 right, .96 wrong (1/2), .2 right, none wrong (2/4)
	for k, want := range []float64{0.5, 1, nan, nan} {
		if got := f.parts[k]; got != want && !(math.IsNaN(got) && math.IsNaN(want)) {
			t.Errorf("part %d: %v, want %v", k, got, want)
		}
	}
	if f.rows != 4 || f.unscored != 1 || f.near.Caught != 2 || f.near.Hits != 1 || f.held.Caught != 1 || f.held.Hits != 0 ||
		f.sure.Caught != 2 || f.sure.Hits != 1 {
		t.Errorf("%+v", f)
	}
	// .96 and .97 share a bin, in which one of two is wrong
	if want := (0.96 + 0.97 - 1 + 0.2) / 3; math.Abs(f.calibration.Error()-want) > 1e-12 {
		t.Errorf("calibration error %v, want %v", f.calibration.Error(), want)
	}
	if want := (math.Abs(0.9+0.97-1) + 0.1) / 3; math.Abs(f.fold.Error()-want) > 1e-12 {
		t.Errorf("calibration error out of fold %v, want %v", f.fold.Error(), want)
	}
}

// What the product's sweep says of a table is what the trainer says of it.
func TestSweepOfATableIsTheTrainersFit(t *testing.T) {
	in := mustCase(t, wineJobs(t)[2]).Input
	want, facts, err := fitModel(context.Background(), in)
	if err != nil {
		t.Fatal(err)
	}
	got, swept, err := sweepTable(context.Background(), in)
	if err != nil {
		t.Fatal(err)
	}
	for i := range want {
		if got[i] != want[i] && !(math.IsNaN(got[i].P) && math.IsNaN(want[i].P)) {
			t.Fatalf("row %d: %+v, want %+v", i, got[i], want[i])
		}
	}
	if swept.Threshold != facts.Threshold || swept.Noise.Share != facts.Noise.Share {
		t.Errorf("threshold %v and share %v, want %v and %v", swept.Threshold, swept.Noise.Share, facts.Threshold, facts.Noise.Share)
	}
}
