package noise

import "slices"

// A flip rate and a flat class posterior explain the same labels: where every row of a class is at most 70 % likely,
// either the classes overlap everywhere or 30 % of the labels are wrong. Which of the two a data set is cannot be seen
// in it (Scott, Blanchard & Handy 2013). What decides here is a prior: of every class, some rows are sure. The mean
// probability t of a class's surest rows has the log-density −strictness·(1−t)², half-normal with a standard deviation
// of 1/√(2·strictness) = 0.1.
const (
	strictness = 50.0
	sureShare  = 0.1 // of a class's observed rows that count as its surest
	sureRows   = 5   // at least so many

	// ownRows is the cost in nats of a class that flips always and has no sure row of its own: a class nobody can point
	// at can't be said to flip.
	ownRows = 30.0
)

// sureness is the log-density, up to a constant, that the prior gives to the class probabilities of p.
func sureness(d *Data, p *Params) float64 {
	k, n := d.Classes, d.Rows()
	prob := make([][]float64, k)
	for c := range prob {
		prob[c] = make([]float64, n)
	}
	count := make([]int, k)
	r := newRow(k)
	for i := range n {
		p.logits(r, d.Members, i)
		for c, v := range r.prob {
			prob[c][i] = v
		}
		count[d.Observed[i]]++
	}
	v := 0.0
	for c := range prob {
		share := 0.0
		for _, x := range prob[c] {
			share += x
		}
		share /= float64(n)
		m := min(n, max(sureRows, int(sureShare*float64(count[c]))))
		slices.Sort(prob[c])
		t := 0.0
		for _, x := range prob[c][n-m:] {
			t += x
		}
		t /= float64(m)
		v -= strictness * share * float64(k) * (1 - t) * (1 - t)
		v -= ownRows * (1 - p.Flip[c*k+c]) * (1 - t)
	}
	return v
}
