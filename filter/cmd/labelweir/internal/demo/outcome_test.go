package demo

import (
	"math"
	"path/filepath"
	"strings"
	"testing"

	"labelweir/connectors/arrowfile"
	"labelweir/connectors/table"
	"labelweir/filter"
	"labelweir/model"
)

// oracle is a finding that knows the truth: wrong grades score high, in the order of the apples.
func oracle(h *Harvest) *found {
	n := h.Rows()
	f := &found{score: make([]float64, n), verdict: make([]string, n), held: make([]bool, n)}
	for i := range n {
		f.score[i], f.verdict[i] = 0, "pass"
		if h.wrong(i) {
			f.score[i], f.verdict[i], f.held[i] = 1, "quarantine", i%2 == 0
		}
	}
	return f
}

func TestAPerfectFindingComparesAsPerfect(t *testing.T) {
	h := Grow(4000, 1)
	o := compare(h, oracle(h))
	if o.Average != 1 || o.Top != o.Planted || o.SuspectHit != o.Planted || o.Suspect != o.Planted || o.HeldHit != o.Held {
		t.Errorf("got %+v", *o)
	}
	for _, g := range o.Graders {
		if g.Planted != g.Estimated {
			t.Errorf("%s: planted %v, estimated %v", g.Name, g.Planted, g.Estimated)
		}
	}
}

// TestAFindingWithoutOrderComparesAsChance holds average precision against its value for scores that all tie, ranked by
// apple number here: close to the share of wrong grades in a line where they are spread evenly.
func TestAFindingWithoutOrderComparesAsChance(t *testing.T) {
	h := Grow(20000, 1)
	f := oracle(h)
	for i := range f.score {
		f.score[i], f.verdict[i], f.held[i] = 0.5, "pass", false
	}
	f.score[0] = math.NaN()
	o := compare(h, f)
	if share := ratio(o.Planted, o.Rows); o.Average > 2*share || o.Average < share/2 {
		t.Errorf("average precision %.4f at a share of %.4f", o.Average, share)
	}
	if o.Scored != o.Rows-1 || o.Held != 0 || o.Suspect != 0 {
		t.Errorf("got %+v", *o)
	}
	var b strings.Builder
	if err := o.WriteText(&b); err != nil || !strings.Contains(b.String(), "0 are among the 0 held back (– of these") {
		t.Errorf("%v in\n%s", err, b.String())
	}
}

// deliver sends a harvest through the connector with tags that the given function makes, and gives the files' paths.
func deliver(t *testing.T, h *Harvest, tag func(i int64) filter.Tag) (tagged, held string) {
	t.Helper()
	dir := t.TempDir()
	line := filepath.Join(dir, "line.arrow")
	if err := h.WriteLine(line); err != nil {
		t.Fatal(err)
	}
	out := table.OutputPaths{Tagged: filepath.Join(dir, "passed.arrow"), Quarantine: filepath.Join(dir, "held.arrow")}
	source, err := arrowfile.Open(line, filter.Record{Label: "grade", Source: "grader", Time: "graded_at"}, table.DefaultOptions())
	if err != nil {
		t.Fatal(err)
	}
	defer source.Close()
	sink, err := table.Create(out, source, table.DefaultOptions())
	if err != nil {
		t.Fatal(err)
	}
	defer sink.Close()
	for {
		b, err := source.Next(t.Context())
		if err != nil {
			break
		}
		tags := make([]filter.Tag, b.Rows())
		for i := range tags {
			tags[i] = tag(b.First + int64(i))
		}
		err = sink.Deliver(t.Context(), b, tags)
		b.Release()
		if err != nil {
			t.Fatal(err)
		}
	}
	if err := sink.Commit(t.Context()); err != nil {
		t.Fatal(err)
	}
	return out.Tagged, out.Quarantine
}

func TestTagsAreReadBackAsTheyWereDelivered(t *testing.T) {
	h := Grow(9000, 1) // three record batches
	tag := func(i int64) filter.Tag {
		switch i % 3 {
		case 0:
			return filter.Tag{Score: float64(i), Verdict: filter.Quarantine, Divert: true}
		case 1:
			return filter.Tag{Score: math.NaN(), Margin: math.NaN(), Verdict: filter.Unscored, Reason: model.NoLabel}
		}
		return filter.Tag{Score: 0.25, Verdict: filter.Pass}
	}
	tagged, held := deliver(t, h, tag)
	f, err := readFound(h.Rows(), tagged, held)
	if err != nil {
		t.Fatal(err)
	}
	for i := range h.Rows() {
		want := tag(int64(i))
		same := f.score[i] == want.Score || math.IsNaN(f.score[i]) && math.IsNaN(want.Score)
		if !same || f.verdict[i] != want.Verdict.String() || f.held[i] != want.Divert {
			t.Fatalf("apple %d: %v, %s, %v", i, f.score[i], f.verdict[i], f.held[i])
		}
	}
	if _, err := readFound(h.Rows()+1, tagged, held); err == nil || err.Error() != "9001 apples went in, 9000 came out" {
		t.Errorf("a missing apple gave %v", err)
	}
	if _, err := readFound(h.Rows(), tagged, tagged); err == nil || !strings.Contains(err.Error(), "twice") {
		t.Errorf("doubled apples gave %v", err)
	}
}
