package filter

import (
	"fmt"

	"labelweir/model"
)

// tally adds up what a report tells.
type tally struct {
	in     int64
	rows   Rows // without in and out
	noise  noiseMean
	newest *trained
	weight int64 // rows judged by newest

	chains   []Chain
	retrains Retrains
	failure  string // of the first retrain that failed
}

func newTally() *tally { return &tally{noise: newNoiseMean(), chains: []Chain{}} }

// count takes a tag in.
func (t *tally) count(tag *Tag) {
	v, r := &t.rows.Verdicts, &t.rows.Reasons
	switch tag.Verdict {
	case Pass:
		v.Pass++
	case Suspect:
		v.Suspect++
	case Quarantine:
		v.Quarantine++
	case Unscored:
		v.Unscored++
	}
	switch tag.Reason {
	case model.Scored:
		t.rows.Scored++
		t.weight++
	case model.NoLabel:
		r.NoLabel++
	case model.NewClass:
		r.NewClass++
	case model.NotFinite:
		r.NotFinite++
	case model.WarmingUp:
		r.WarmingUp++
	case model.InputsChanged:
		r.InputsChanged++
	}
}

// fitted takes a new fit in.
func (t *tally) fitted(fit *trained) {
	t.close()
	t.newest, t.weight = fit, 0
	if fit.facts.Warm {
		t.retrains.Warm++
	} else {
		t.retrains.Cold++
	}
	for _, c := range fit.facts.Chains {
		t.chain(c)
	}
}

// close takes in what the newest snapshot found, weighted by the rows it has judged.
func (t *tally) close() {
	if t.newest != nil && t.weight > 0 {
		t.noise.add(t.newest.facts, float64(t.weight))
	}
	t.weight = 0
}

// chain adds a chain's counts to those of the same name.
func (t *tally) chain(c model.Chain) {
	for i := range t.chains {
		if s := &t.chains[i]; s.Name == c.Name {
			if n := s.Tried + c.Tried; n > 0 {
				s.MeanGap = (s.MeanGap*Number(s.Tried) + Number(c.MeanGap)*Number(c.Tried)) / Number(n)
			}
			s.Tried += c.Tried
			s.Won += c.Won
			return
		}
	}
	t.chains = append(t.chains, Chain{c.Name, c.Tried, c.Won, Number(c.MeanGap)})
}

// failed takes in a retrain that was not possible, after so many rows; 0: with the whole input.
func (t *tally) failed(rows int64, err error) {
	if t.retrains.Failed++; t.retrains.Failed > 1 {
		return
	}
	t.failure = err.Error()
	if rows > 0 {
		t.failure = fmt.Sprintf("after row %d: %v", rows-1, err)
	}
}

// report makes the report of what has passed; the fields are left to whoever chose them.
func (e *engine) report() *Report {
	t, c := e.tally, e.s.Config
	r := &Report{Version: ReportVersion, Mode: c.Mode.String(), Precision: c.Precision, Rows: t.rows,
		Window: WindowUsed{Kind: "whole", Records: c.Records}, Threshold: notANumber(), Chains: t.chains,
		Retrains: t.retrains, Breaker: e.breaker.report(), Times: e.watch.phases(), Fields: []FieldUse{}, Notes: []string{}}
	r.Rows.In, r.Rows.Tagged, r.Rows.Quarantine = t.in, e.out.tagged.Load(), e.out.held.Load()
	switch {
	case t.newest == nil && t.retrains.Failed > 0:
		r.Notes = append(r.Notes, "no record could be scored: "+t.failure)
	case t.newest == nil:
		r.Notes = append(r.Notes, "no record could be scored: none has a label")
	case t.retrains.Failed > 0:
		r.Notes = append(r.Notes, fmt.Sprintf("%d retrains were not possible and kept the snapshot before, if any; the first %s",
			t.retrains.Failed, t.failure))
	}
	if t.newest == nil {
		return r
	}
	t.close()
	f := t.newest.facts
	r.Snapshot, r.Threshold, r.Window.Trained = t.newest.id, Number(f.Threshold), f.Rows
	r.Choice = &Choice{Encoder: f.Choice.Encoder, Q: Number(f.Choice.Q), Lambda: Number(f.Choice.Lambda),
		Why: f.Choice.Why, Members: []Member{}}
	for _, m := range f.Choice.Members {
		r.Choice.Members = append(r.Choice.Members, Member{m.Name, Number(m.Weight)})
	}
	latest := noiseOf(f)
	r.Noise = t.noise.mean()
	if r.Noise == nil {
		r.Noise = latest
	}
	if t.retrains.Cold+t.retrains.Warm > 1 {
		r.Latest = latest
	}
	r.Notes = append(r.Notes, telltales(t.newest.view.Table)...)
	return r
}
