package model

// Score is what a snapshot says of one row.
type Score struct {
	P       float64 // mislabel score: probability in [0,1] that the observed label is wrong; NaN when not scored
	Margin  float64 // calibrated log-odds of the observed class against the best other; < 0 when the other is ahead
	Implied int32   // index into Snapshot.Classes of the most probable class; −1 when not scored
	Reason  Reason  // why there is no score; Scored when there is one
}

// Reason says why a row has no score.
type Reason uint8

// The reasons, in the order in which they are looked for.
const (
	Scored        Reason = iota
	NoLabel              // the record came without a label
	NewClass             // its label is of a class the snapshot has not learned
	NotFinite            // a field holds an infinite number
	WarmingUp            // no snapshot yet
	InputsChanged        // the inputs have just changed, the snapshot is not to be trusted on them
)

// String gives the reason's name as users meet it; it is empty for Scored.
func (r Reason) String() string {
	return [...]string{"", "no-label", "new-class", "not-finite", "warming-up", "inputs-changed"}[r]
}
