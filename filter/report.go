package filter

import (
	"encoding/json"
	"math"
)

// ReportVersion is the version of the report's JSON form. Fields may be added within a version; a field that goes or
// changes its meaning makes a new one.
const ReportVersion = 1

// Report tells what a sweep did and found. Shares lie in [0,1]; a number that is not known is null in JSON.
type Report struct {
	Version   int        `json:"version"`
	Mode      string     `json:"mode"`             // observe or divert
	Window    WindowUsed `json:"window"`           // what was trained on
	Rows      Rows       `json:"rows"`             // the meters: in = tagged + quarantine + unreadable
	Snapshot  string     `json:"snapshot"`         // id of the newest snapshot; empty when there was none
	Precision float64    `json:"precision"`        // wanted among held-back records
	Threshold Number     `json:"threshold"`        // of the newest snapshot; above 1: nothing may be held back; null: no snapshot
	Noise     *Noise     `json:"noise"`            // null when there was no snapshot
	Latest    *Noise     `json:"latest,omitempty"` // sliding: of the newest snapshot alone
	Choice    *Choice    `json:"choice"`           // of the newest snapshot
	Chains    []Chain    `json:"chains"`           // added up over all retrains
	Retrains  Retrains   `json:"retrains"`
	Breaker   Breaker    `json:"breaker"`
	Times     []Spent    `json:"times"`
	Fields    []FieldUse `json:"fields"` // filled in by whoever chose the fields
	Notes     []string   `json:"notes"`  // sentences for the reader: what could not be done and why
}

// WindowUsed says what was trained on.
type WindowUsed struct {
	Kind        string  `json:"kind"`         // whole or sliding
	Records     int     `json:"records"`      // most rows trained on at a time
	SpanSeconds float64 `json:"span_seconds"` // 0: no limit on age
	Trained     int     `json:"trained"`      // rows in the newest fit
	Sampled     bool    `json:"sampled"`      // fewer rows were trained on than there were
}

// Rows counts records. In = Tagged + Quarantine + Unreadable; Scored + Unscored = In − Unreadable.
type Rows struct {
	In         int64 `json:"in"`
	Tagged     int64 `json:"tagged"`     // delivered to the tagged output
	Quarantine int64 `json:"quarantine"` // delivered to the quarantine output: held back
	Unreadable int64 `json:"unreadable"` // could not be decoded
	Scored     int64 `json:"scored"`

	Verdicts Verdicts `json:"verdicts"`
	Reasons  Reasons  `json:"reasons"` // of the unscored
}

// Verdicts counts records by verdict, whether held back or not.
type Verdicts struct {
	Pass       int64 `json:"pass"`
	Suspect    int64 `json:"suspect"`
	Quarantine int64 `json:"quarantine"`
	Unscored   int64 `json:"unscored"`
}

// Reasons counts unscored records by reason.
type Reasons struct {
	NoLabel       int64 `json:"no_label"`
	NewClass      int64 `json:"new_class"`
	NotFinite     int64 `json:"not_finite"`
	WarmingUp     int64 `json:"warming_up"`
	InputsChanged int64 `json:"inputs_changed"`
}

// Noise is the estimated label noise. With several snapshots each number is the mean over them, weighted by the rows
// each judged, and so are the ends of the intervals. Intervals are approximate, for 90 %.
type Noise struct {
	Share   Rate     `json:"share"`   // wrong labels among all records
	Classes []Named  `json:"classes"` // among the records with that observed label
	Sources []Named  `json:"sources"` // among the records of that source
	Flip    [][]Rate `json:"flip"`    // P(observed = j | true = i), in the order of Classes; rows sum to 1
	Model   string   `json:"model"`   // noise model with the highest evidence in the newest snapshot
	Unclear []string `json:"unclear"` // classes whose noise can't be told from overlap: their rates are not to be used
}

// Named is an estimate with the name of its class or source.
type Named struct {
	Name string `json:"name"`
	Rate
}

// Rate is a share with its approximate 90 % interval.
type Rate struct {
	Value Number `json:"value"`
	Low   Number `json:"low"`
	High  Number `json:"high"`
	Rows  int    `json:"rows"` // rows it rests on
}

// Number is a float64 whose JSON form is null when it is not finite; null is read as NaN.
type Number float64

// MarshalJSON gives the shortest form that reads back the same.
func (n Number) MarshalJSON() ([]byte, error) {
	if f := float64(n); !math.IsNaN(f) && !math.IsInf(f, 0) {
		return json.Marshal(f)
	}
	return []byte("null"), nil
}

// UnmarshalJSON reads what MarshalJSON wrote.
func (n *Number) UnmarshalJSON(b []byte) error {
	if string(b) == "null" {
		*n = Number(math.NaN())
		return nil
	}
	return json.Unmarshal(b, (*float64)(n))
}

// Choice is what the search settled on.
type Choice struct {
	Encoder string   `json:"encoder"`
	Q       Number   `json:"q"`
	Lambda  Number   `json:"lambda"`
	Why     string   `json:"why"`
	Members []Member `json:"members"` // scorers whose weighted sum is the score
}

// Member is one scorer of the sum, with its weight in log-odds.
type Member struct {
	Name   string `json:"name"`
	Weight Number `json:"weight"`
}

// Chain counts how often one kind of optimisation run was tried and had the lowest objective.
type Chain struct {
	Name    string `json:"name"`
	Tried   int    `json:"tried"`
	Won     int    `json:"won"`
	MeanGap Number `json:"mean_gap"` // mean of (J − best J)/best J over its tries
}

// Retrains counts fits.
type Retrains struct {
	Cold   int `json:"cold"`   // searched for encoder, λ and q
	Warm   int `json:"warm"`   // started from the snapshot before
	Failed int `json:"failed"` // kept the snapshot before, or none
}

// Breaker tells when diverting was stopped.
type Breaker struct {
	Open   bool           `json:"open"`   // at the end, for any cause
	Opened int            `json:"opened"` // how often
	Events []BreakerEvent `json:"events"` // the first 100
}

// BreakerEvent is one opening or closing.
type BreakerEvent struct {
	Row   int64  `json:"row"`             // number of the record, from 0, at which it happened
	Open  bool   `json:"open"`            // false: it closed
	Cause string `json:"cause"`           // budget, class-budget or change
	Class string `json:"class,omitempty"` // class-budget: which
	Why   string `json:"why"`             // a sentence with the numbers
}

// Spent is the time one phase took; phases of goroutines that ran beside each other overlap.
type Spent struct {
	Phase   string  `json:"phase"` // read, fit/<phase of the fit>, score, write
	Seconds float64 `json:"seconds"`
}

// FieldUse tells how one column of the input was used.
type FieldUse struct {
	Path string `json:"path"`
	Use  string `json:"use"`           // feature, label, source, time or left-out
	Kind string `json:"kind"`          // number, category, vector; empty when it is no feature
	Why  string `json:"why,omitempty"` // why it was left out
}
