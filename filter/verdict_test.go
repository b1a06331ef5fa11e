package filter

import (
	"math"
	"testing"

	"labelweir/model"
)

func TestVerdictFollowsTheScore(t *testing.T) {
	nan := math.NaN()
	for _, c := range []struct {
		name      string
		threshold float64
		s         model.Score
		want      Verdict
		reason    model.Reason
	}{
		{"sure enough", 0.9, model.Score{P: 0.9}, Quarantine, model.Scored},
		{"just not", 0.9, model.Score{P: 0.8999}, Suspect, model.Scored},
		{"more likely wrong", 0.9, model.Score{P: 0.5}, Suspect, model.Scored},
		{"more likely right", 0.9, model.Score{P: 0.4999}, Pass, model.Scored},
		{"nothing may be held back", 1.5, model.Score{P: 1}, Suspect, model.Scored},
		{"no score", 0.9, model.Score{P: nan, Margin: nan, Implied: -1, Reason: model.NewClass}, Unscored, model.NewClass},
		{"a score that is no number", 0.9, model.Score{P: nan}, Unscored, model.NotFinite},
	} {
		f := &trained{id: "abc", facts: &model.Facts{Threshold: c.threshold, Classes: grades()}}
		got := f.verdict(&c.s)
		if got.Verdict != c.want || got.Reason != c.reason {
			t.Errorf("%s: %v %q, want %v %q", c.name, got.Verdict, got.Reason, c.want, c.reason)
		}
		if c.reason == model.Scored && (got.Score != c.s.P || got.Implied != "cull" || got.Snapshot != "abc") {
			t.Errorf("%s: %+v", c.name, got)
		}
		if c.reason != model.Scored && (!math.IsNaN(got.Score) || !math.IsNaN(got.Margin) || got.Implied != "" || got.Snapshot != "") {
			t.Errorf("%s: %+v", c.name, got)
		}
	}
}
