package model

import (
	"bytes"
	"errors"
	"flag"
	"os"
	"path/filepath"
	"reflect"
	"strings"
	"testing"

	"labelweir/model/internal/encode"
	"labelweir/model/internal/fresh"
	"labelweir/model/internal/noise"
)

var update = flag.Bool("update", false, "write golden files anew")

func saved(t testing.TB, s *Snapshot) []byte {
	t.Helper()
	var b bytes.Buffer
	if n, err := s.WriteTo(&b); err != nil || n != int64(b.Len()) {
		t.Fatalf("%d bytes of %d, %v", n, b.Len(), err)
	}
	return b.Bytes()
}

func loaded(t testing.TB, b []byte) *Snapshot {
	t.Helper()
	s, err := ReadSnapshot(bytes.NewReader(b))
	if err != nil {
		t.Fatal(err)
	}
	return s
}

// scores are those of all rows of a table.
func scores(t testing.TB, s *Snapshot, table *Table) []Score {
	t.Helper()
	out := make([]Score, table.Rows())
	if err := s.NewScorer().Score(table, 0, table.Rows(), out); err != nil {
		t.Fatal(err)
	}
	return out
}

// sameScores compares bit for bit, NaN included.
func sameScores(a, b []Score) bool {
	for i := range a {
		if !same(a[i].P, b[i].P) || !same(a[i].Margin, b[i].Margin) || a[i].Implied != b[i].Implied || a[i].Reason != b[i].Reason {
			return false
		}
	}
	return len(a) == len(b)
}

func same(a, b float64) bool { return a == b || a != a && b != b }

func TestSnapshotSurvivesSaving(t *testing.T) {
	r := recipe{rows: 150, numbers: 3, classes: 3, apart: 2, wrong: 0.1, category: true, missing: 0.05, sources: 2, seed: 3}
	table, _ := r.table()
	trained := fit(t, quick(), table).Snapshot
	r.first, r.rows = 150, 300
	news, _ := r.table()
	for name, c := range map[string]struct {
		s     *Snapshot
		table *Table
	}{"trained": {trained, news}, "handmade": {handmade(t), handmadeTable()}} {
		t.Run(name, func(t *testing.T) {
			b := saved(t, c.s)
			back := loaded(t, b)
			if back.ID() != c.s.ID() || len(c.s.ID()) != 12 {
				t.Errorf("id %q, was %q", back.ID(), c.s.ID())
			}
			if !bytes.Equal(saved(t, back), b) {
				t.Error("saved anew, the bytes differ")
			}
			for what, pair := range map[string][2]any{"facts": {back.facts, c.s.facts}, "fields": {back.fields, c.s.fields},
				"encoder": {back.encoder, c.s.encoder}, "members": {back.machine, c.s.machine}, "steps": {back.layer.Steps, c.s.layer.Steps}} {
				if !reflect.DeepEqual(pair[0], pair[1]) {
					t.Errorf("%s differ: %+v, was %+v", what, pair[0], pair[1])
				}
			}
			for i, m := range back.layer.Models {
				if was := c.s.layer.Models[i]; m.Name != was.Name || m.Weight != was.Weight || !reflect.DeepEqual(m.P, was.P) {
					t.Errorf("noise model %+v, was %+v", m, was)
				}
			}
			if !sameScores(scores(t, back, c.table), scores(t, c.s, c.table)) {
				t.Error("scores differ after saving and loading")
			}
		})
	}
}

// Files of version 1 must stay readable, and what is written must not change without a new version.
func TestSavedFormIsThatOfVersion1(t *testing.T) {
	path := filepath.Join("testdata", "version1.snapshot")
	got := saved(t, handmade(t))
	if *update {
		if err := os.WriteFile(path, got, 0o644); err != nil {
			t.Fatal(err)
		}
	}
	want, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	if !bytes.Equal(got, want) {
		t.Errorf("%d bytes written, %d stand in %s, or they differ", len(got), len(want), path)
	}
	loaded(t, want)
}

// Every exported field is saved: one that this list does not know needs a place in the saved form and a new version.
func TestSavedFormKnowsEveryField(t *testing.T) {
	for _, c := range []struct {
		of   any
		want string
	}{
		{Facts{}, "Rows Classes ClassRows Sources Choice Chains Noise Threshold Warm"},
		{Choice{}, "Encoder Q Lambda Why Members"},
		{Member{}, "Name Weight"},
		{Chain{}, "Name Tried Won MeanGap"},
		{Noise{}, "Share ByClass BySource Flip Model Unclear"},
		{Estimate{}, "Value Low High Rows"},
		{field{}, "Name Kind Size"},
		{encode.Part{}, "Numbers Levels"},
		{encode.Number{}, "Knots Normal Edges Missing Filler"},
		{fresh.Machine{}, "Classes Dense Bins Forests Kernels Members"},
		{fresh.Forest{}, "Nodes Low Step Values"},
		{fresh.Node{}, "Feature Cut Split"},
		{fresh.Kernel{}, "Gamma Dim Landmarks"},
		{fresh.Member{}, "Forest At Kernel Linear Pairs Weight Smooth Clip Scale"},
		{fresh.Pair{}, "A B Bias"},
		{noise.Layer{}, "Classes Models Steps"},
		{noise.Model{}, "Name Weight P"},
		{noise.Params{}, "A B Slopes Flip Gamma Tau Rho"},
		{noise.Slope{}, "C D Mu"},
		{noise.Step{}, "At Share"},
	} {
		var got []string
		for f := range reflect.TypeOf(c.of).Fields() {
			if f.IsExported() {
				got = append(got, f.Name)
			}
		}
		if s := strings.Join(got, " "); s != c.want {
			t.Errorf("%T has %s, saved are %s", c.of, s, c.want)
		}
	}
}

func TestWriteToReturnsTheWritersError(t *testing.T) {
	s := handmade(t)
	whole := len(saved(t, s))
	for _, room := range []int{0, 1, 19, 20, 500, whole - 32, whole - 1} {
		w := &narrow{room: room}
		if n, err := s.WriteTo(w); !errors.Is(err, errNarrow) || n != int64(w.n) {
			t.Errorf("room for %d: %d bytes told, %d taken, %v", room, n, w.n, err)
		}
	}
}

var errNarrow = errors.New("no room")

// narrow is a writer that takes only so many bytes.
type narrow struct{ room, n int }

func (w *narrow) Write(p []byte) (int, error) {
	n := min(len(p), w.room-w.n)
	w.n += n
	if n < len(p) {
		return n, errNarrow
	}
	return n, nil
}
