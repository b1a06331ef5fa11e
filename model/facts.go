package model

// Estimate is a share with its approximate 90 % interval.
type Estimate struct {
	Value float64 `json:"value"`
	Low   float64 `json:"low"`
	High  float64 `json:"high"`
	Rows  int     `json:"rows"` // rows it rests on
}

// Facts tells what a snapshot was fitted on, what was chosen, and what it found. All of it is saved with the snapshot.
type Facts struct {
	Rows      int      `json:"rows"`       // labelled rows trained on
	Classes   []string `json:"classes"`    // sorted
	ClassRows []int    `json:"class_rows"` // by observed label
	Sources   []string `json:"sources,omitempty"`
	Choice    Choice   `json:"choice"`
	Chains    []Chain  `json:"chains"`
	Noise     Noise    `json:"noise"`

	// Threshold is the lowest mislabel score that may be held back at the wanted precision; above 1 when none may.
	Threshold float64 `json:"threshold"`
	Warm      bool    `json:"warm"` // started from the previous snapshot
}

// Choice is what the search settled on.
type Choice struct {
	Encoder string   `json:"encoder"`
	Q       float64  `json:"q"`
	Lambda  float64  `json:"lambda"`
	Why     string   `json:"why"`
	Members []Member `json:"members"` // scorers whose weighted sum is the score
}

// Member is one scorer of the sum, with its weight in log-odds.
type Member struct {
	Name   string  `json:"name"`
	Weight float64 `json:"weight"`
}

// Chain counts how often one kind of optimisation run was tried and had the lowest objective.
type Chain struct {
	Name    string  `json:"name"`
	Tried   int     `json:"tried"`
	Won     int     `json:"won"`
	MeanGap float64 `json:"mean_gap"` // mean of (J − best J)/best J over its tries
}

// Noise is the estimated label noise.
type Noise struct {
	Share    Estimate     `json:"share"`     // wrong labels among all rows
	ByClass  []Estimate   `json:"by_class"`  // among the rows with that observed label
	BySource []Estimate   `json:"by_source"` // among the rows of that source
	Flip     [][]Estimate `json:"flip"`      // P(observed = j | true = i); rows sum to 1
	Model    string       `json:"model"`     // the noise model with the highest evidence
	Unclear  []string     `json:"unclear"`   // classes whose noise can't be told from overlap; their rates are not to be used
}
