package noise

import "slices"

// quickSteps bound the EM of a quick fit.
const quickSteps = 25

// Quick fits only the plain models, without slopes and boundary flips, and keeps the one with the highest evidence: the
// judge between settings, and the means of cleaning labels before a second fit. It returns the evidence. Of many rows it looks at some.
func Quick(d *Data) (*Layer, float64) {
	d = d.thin(quickRows)
	k := d.Classes
	first := run(d, start(d), "none", shape{flips: none}, quickSteps)
	p := first.p.clone()
	p.Flip = uniform(k, 0.1)
	one := run(d, p, "single", shape{flips: single}, quickSteps)
	all := []*candidate{first, one, run(d, one.p.clone(), "free", shape{flips: free}, quickSteps)}
	if d.Source != nil && d.Sources > 1 {
		for _, base := range all[1:3] {
			p := base.p.clone()
			p.Rho = slices.Repeat([]float64{1}, d.Sources)
			all = append(all, run(d, p, base.name+"+source", shape{flips: base.shape.flips, source: true}, quickSteps))
		}
	}
	best := all[0]
	for _, c := range all[1:] {
		if !c.refused && c.evidence > best.evidence {
			best = c
		}
	}
	return &Layer{Classes: k, Models: []Model{{Name: best.name, Weight: 1, P: *best.p}}}, best.evidence
}

// Clean writes into chance (n·k) how probable each class is for each row, given its observed label.
func (l *Layer) Clean(d *Data, chance []float64) {
	j := l.NewJudge()
	k := d.Classes
	for i := range d.Rows() {
		j.mix(d.Members, i, int(d.Observed[i]), d.source(i))
		copy(chance[i*k:i*k+k], j.post)
	}
}
