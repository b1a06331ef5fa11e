package metric

// Cut counts what lies at or above a threshold.
type Cut struct {
	Rows   int // all rows
	Wrong  int // wrong labels among them
	Caught int // rows with score ≥ threshold
	Hits   int // wrong labels among the caught
}

// CutAt counts the rows with p ≥ threshold; NaN is never caught. len(p) = len(wrong).
func CutAt(wrong []bool, p []float64, threshold float64) Cut {
	if len(p) != len(wrong) {
		panic("metric: shapes differ")
	}
	c := Cut{Rows: len(p)}
	for i := range p {
		if wrong[i] {
			c.Wrong++
		}
		if p[i] >= threshold {
			c.Caught++
			if wrong[i] {
				c.Hits++
			}
		}
	}
	return c
}

// Add adds the counts of o.
func (c *Cut) Add(o Cut) {
	c.Rows += o.Rows
	c.Wrong += o.Wrong
	c.Caught += o.Caught
	c.Hits += o.Hits
}

// Precision is the share of wrong labels among the caught rows; NaN when none are caught.
func (c Cut) Precision() float64 { return float64(c.Hits) / float64(c.Caught) }

// Recall is the share of the wrong labels that is caught; NaN when none are wrong.
func (c Cut) Recall() float64 { return float64(c.Hits) / float64(c.Wrong) }

// Share is the share of all rows that is caught; NaN without rows.
func (c Cut) Share() float64 { return float64(c.Caught) / float64(c.Rows) }
