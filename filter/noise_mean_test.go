package filter

import (
	"encoding/json"
	"math"
	"testing"

	"labelweir/model"
)

// factsOf are the facts of a snapshot with these classes, whose shares are v, 2v, … and whose flips are all v.
func factsOf(v float64, classes ...string) *model.Facts {
	e := func(x float64) model.Estimate { return model.Estimate{Value: x, Low: x / 2, High: 2 * x, Rows: 100} }
	f := &model.Facts{Classes: classes, Sources: []string{"Anke"}}
	f.Noise = model.Noise{Share: e(v), BySource: []model.Estimate{e(v)}, Model: "single"}
	for i := range classes {
		f.Noise.ByClass = append(f.Noise.ByClass, e(v*float64(i+1)))
		row := make([]model.Estimate, len(classes))
		for j := range row {
			row[j] = e(v)
		}
		f.Noise.Flip = append(f.Noise.Flip, row)
	}
	return f
}

func near(a Number, b float64) bool { return math.Abs(float64(a)-b) < 1e-12 }

func TestNoiseIsTheMeanWeightedByRows(t *testing.T) {
	m := newNoiseMean()
	m.add(factsOf(0.1, "cull", "first"), 3000)
	m.add(factsOf(0.2, "cull", "second"), 1000)
	n := m.mean()
	if !near(n.Share.Value, 0.125) || !near(n.Share.Low, 0.0625) || !near(n.Share.High, 0.25) || n.Share.Rows != 100 {
		t.Errorf("share %+v", n.Share)
	}
	var names string
	for _, c := range n.Classes {
		names += c.Name + " "
	}
	if names != "cull first second " {
		t.Fatalf("classes %s", names)
	}
	// first and second are each known to one snapshot alone.
	for i, want := range []float64{0.125, 0.2, 0.4} {
		if !near(n.Classes[i].Value, want) {
			t.Errorf("%s: %v, want %v", n.Classes[i].Name, n.Classes[i].Value, want)
		}
	}
	if !near(n.Flip[0][0].Value, 0.125) || !near(n.Flip[0][1].Value, 0.1) || !near(n.Flip[0][2].Value, 0.2) {
		t.Errorf("flips of cull %+v", n.Flip[0])
	}
	if !math.IsNaN(float64(n.Flip[1][2].Value)) {
		t.Errorf("a flip that no snapshot knows is %+v", n.Flip[1][2])
	}
}

func TestUnclearClassesTakeNoPart(t *testing.T) {
	m := newNoiseMean()
	a, b := factsOf(0.1, "cull", "first"), factsOf(0.3, "cull", "first")
	b.Noise.Unclear = []string{"first"}
	m.add(a, 600)
	m.add(b, 500)
	n := m.mean()
	if len(n.Unclear) != 0 || !near(n.Classes[1].Value, 0.2) || !near(n.Flip[1][0].Value, 0.1) {
		t.Errorf("unclear %v, first %+v, flips %+v", n.Unclear, n.Classes[1], n.Flip[1])
	}
	m.add(b, 100)
	if n = m.mean(); len(n.Unclear) != 1 || n.Unclear[0] != "first" {
		t.Errorf("unclear %v with half of the weight", n.Unclear)
	}
}

func TestNoiseOfNothing(t *testing.T) {
	m := newNoiseMean()
	if n := m.mean(); n != nil {
		t.Errorf("%+v", n)
	}
	f := factsOf(0.1, "cull", "first")
	f.Noise.Share.Value = math.NaN()
	b, err := json.Marshal(noiseOf(f).Share)
	if want := `{"value":null,"low":null,"high":null,"rows":0}`; err != nil || string(b) != want {
		t.Errorf("%s, %v, want %s", b, err, want)
	}
}

func TestChainsAreAddedUp(t *testing.T) {
	c := newTally()
	for _, k := range []model.Chain{{Name: "warm", Tried: 10, Won: 8, MeanGap: 0.1}, {Name: "cold", Tried: 2, Won: 2},
		{Name: "warm", Tried: 30, Won: 3, MeanGap: 0.2}, {Name: "idle"}, {Name: "idle"}} {
		c.chain(k)
	}
	if len(c.chains) != 3 || c.chains[0].Tried != 40 || c.chains[0].Won != 11 || !near(c.chains[0].MeanGap, 0.175) || c.chains[2].MeanGap != 0 {
		t.Errorf("%+v", c.chains)
	}
}
