package noise

import (
	"math"
	"os"
	"strconv"
	"strings"
	"testing"

	"gonum.org/v1/gonum/optimize"
)

// fields reads a table written by testdata/reference.py.
func fields(t *testing.T, name string) [][]string {
	t.Helper()
	b, err := os.ReadFile("testdata/" + name)
	if err != nil {
		t.Fatal(err)
	}
	var out [][]string
	for line := range strings.Lines(string(b)) {
		out = append(out, strings.Split(strings.TrimSpace(line), "\t"))
	}
	return out
}

func number(t *testing.T, s string) float64 {
	t.Helper()
	v, err := strconv.ParseFloat(s, 64)
	if err != nil {
		t.Fatal(err)
	}
	return v
}

// Without flips the model is a logistic regression on the difference of the class scores: scikit-learn's
// LogisticRegression without penalty has the same slope and intercept up to our weak prior.
func TestPlainModelIsLogisticRegression(t *testing.T) {
	rows := fields(t, "logistic.tsv")
	slope, intercept := number(t, rows[0][1]), number(t, rows[0][2])
	d := &Data{Classes: 2, Members: [][]float64{nil}}
	for _, r := range rows[1:] {
		s := number(t, r[1])
		d.Members[0] = append(d.Members[0], -s/2, s/2)
		d.Observed = append(d.Observed, int32(number(t, r[2])))
	}
	p := start(d)
	fit(d, p, shape{flips: none}, coldSteps, nil)
	if b := p.B[1] - p.B[0]; math.Abs(p.A[0]-slope) > 0.02 || math.Abs(b-intercept) > 0.02 {
		t.Errorf("slope %v, intercept %v; scikit-learn has %v and %v", p.A[0], b, slope, intercept)
	}
}

// With three classes and two members the fit is the maximum of the penalised likelihood that gonum's L-BFGS finds.
func TestPlainModelIsTheMaximum(t *testing.T) {
	d, _ := plant{rows: 500, spread: 1.5, flip: []float64{1, 0, 0, 0, 1, 0, 0, 0, 1}, seed: 12}.draw()
	other, _ := plant{rows: 500, spread: 1, flip: []float64{1, 0, 0, 0, 1, 0, 0, 0, 1}, seed: 13}.draw()
	for i, v := range d.Members[0] {
		other.Members[0][i] += v / 2
	}
	d.Members = append(d.Members, other.Members[0])
	p := start(d)
	fit(d, p, shape{flips: none}, coldSteps, nil)

	size := d.sizes()
	value := func(x []float64) float64 {
		q := &Params{A: x[:2], B: x[2:], Flip: p.Flip}
		r, ll := newRow(3), q.prior(size)
		for i, o := range d.Observed {
			q.logits(r, d.Members, i)
			ll += math.Log(r.prob[o])
		}
		return -ll
	}
	slope := func(g, x []float64) {
		for i, at := range x {
			x[i] = at + 1e-5
			up := value(x)
			x[i] = at - 1e-5
			g[i] = (up - value(x)) / 2e-5
			x[i] = at
		}
	}
	best, err := optimize.Minimize(optimize.Problem{Func: value, Grad: slope}, []float64{1, 1, 0, 0, 0}, &optimize.Settings{GradientThreshold: 1e-3}, &optimize.LBFGS{})
	if err != nil {
		t.Fatal(err)
	}
	got := append(append([]float64(nil), p.A...), p.B...)
	if gap := value(got) - best.F; gap > 1e-6*float64(d.Rows())*2 {
		t.Errorf("likelihood is %v short of the maximum", gap)
	}
	for i, want := range best.X {
		if math.Abs(got[i]-want) > 0.02 {
			t.Errorf("weights and biases %v, L-BFGS has %v", got, best.X)
			break
		}
	}
}

// Pooling is scikit-learn's IsotonicRegression.
func TestPoolIsIsotonicRegression(t *testing.T) {
	var at, share, want []float64
	for _, r := range fields(t, "isotonic.tsv") {
		at, share, want = append(at, number(t, r[0])), append(share, number(t, r[1])), append(want, number(t, r[2]))
	}
	l := &Layer{Steps: pool(at, share)}
	for i := range at {
		if got := l.boundaryShare(at[i]); math.Abs(got-want[i]) > 1e-9 {
			t.Errorf("at %v: %v, scikit-learn has %v", at[i], got, want[i])
		}
	}
	if first, last := l.Steps[0].Share, l.Steps[len(l.Steps)-1].Share; l.boundaryShare(-99) != first || l.boundaryShare(99) != last {
		t.Error("beyond the steps the share is not that of the outermost")
	}
}

// SciPy 1.17: binomtest(x, n).proportion_ci(0.9, "wilson"). Ours has the same centre and contains it.
func TestIntervalsContainWilsons(t *testing.T) {
	for _, c := range []struct{ x, n, low, high float64 }{
		{10, 100, 0.060718667015447224, 0.1603555096110922},
		{3, 40, 0.030370252611738993, 0.17348017873690036},
		{0, 20, 0, 0.11915783736096448},
	} {
		i := interval(c.x, c.n)
		half := (c.high - c.low) / 2
		if i.Value != c.x/c.n || i.Low > c.low+1e-12 || i.High < c.high-1e-12 || i.High-i.Low > 6*half {
			t.Errorf("%v of %v: %+v, Wilson has %v to %v", c.x, c.n, i, c.low, c.high)
		}
		if i.Low > 0 && math.Abs(i.Low+i.High-c.low-c.high) > 1e-12 {
			t.Errorf("%v of %v: centre of %+v is not that of %v to %v", c.x, c.n, i, c.low, c.high)
		}
	}
	if i := interval(0, 0); i.Low != 0 || i.High != 1 {
		t.Errorf("of nothing: %+v", i)
	}
}
