package filter

import (
	"math"

	"labelweir/model"
)

// suspectFrom is the mislabel score from which a record is suspect: its label is more likely wrong than right.
const suspectFrom = 0.5

// verdict turns a score into a tag, but for Divert. fit is the one that gave the score.
func (f *trained) verdict(s *model.Score) Tag {
	if s.Reason == model.Scored && math.IsNaN(s.P) {
		return unscored(model.NotFinite)
	}
	if s.Reason != model.Scored {
		return unscored(s.Reason)
	}
	t := Tag{Score: s.P, Margin: s.Margin, Snapshot: f.id, Verdict: Pass}
	if s.Implied >= 0 {
		t.Implied = f.facts.Classes[s.Implied]
	}
	switch {
	case s.P >= f.facts.Threshold:
		t.Verdict = Quarantine
	case s.P >= suspectFrom:
		t.Verdict = Suspect
	}
	return t
}

// unscored is the tag of a record that is not judged.
func unscored(r model.Reason) Tag {
	return Tag{Score: math.NaN(), Margin: math.NaN(), Verdict: Unscored, Reason: r}
}
