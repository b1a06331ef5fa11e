package filter

import (
	"math"

	"labelweir/model"
)

const (
	// tolerated is the rise of the share of records that disagree with the model that is taken for more wrong labels,
	// which are what is looked for: as much as one grader of several, or one field, gone wrong may bring about.
	tolerated = 0.10

	// farMore is the rise that the test is made for: labels that have taken on another meaning.
	farMore = 0.30

	// changeLevel is the level of Page's test. The mean number of records between two false alarms is at least
	// exp(changeLevel), a million, as long as records disagree independently and no more often than is tolerated
	// (Lorden 1971, theorem 2).
	changeLevel = 13.815510557964274

	// minSlice is the fewest scored records by which a slice is judged.
	minSlice = 30
)

// change watches how often the observed label and the model disagree on records the model was not trained on, one
// after the other: Page's test (Page 1954, often named Page–Hinkley) in its likelihood form, for a share that rises
// from p₀ = normal + tolerated to p₁ = normal + farMore,
//
//	g ← max(0, g + ln(p₁/p₀)) for a disagreement, g ← max(0, g + ln((1−p₁)/(1−p₀))) for an agreement,
//
// with an alarm at g ≥ changeLevel. The change is taken to have begun where g was last 0. Once it is open, only the
// slices between retrains count; see slice.
type change struct {
	cooldown int

	normal    float64 // largest share of disagreement that is normal for the newest snapshot
	up, down  float64 // steps of g
	g         float64
	since     int64 // first row since g was 0
	open      bool
	onset     int64   // row at which the change began
	atOpening float64 // normal when it opened
	calm      int     // retrains in a row whose slice was normal
	caughtUp  bool    // the newest snapshot knows only rows from after the onset

	disagree, seen int // in the slice since the last retrain
}

// disagreement counts the rows with a score, and of them those whose label disagrees.
func disagreement(scores []model.Score) (disagree, n int) {
	for i := range scores {
		if d, ok := disagrees(&scores[i]); ok {
			n++
			if d {
				disagree++
			}
		}
	}
	return disagree, n
}

// fitted takes over the normal share from a new snapshot, of whose window k rows of n disagreed with models that did not
// see their labels: two standard errors above that.
func (c *change) fitted(k, n int) {
	p := (float64(k) + 1) / (float64(n) + 2)
	c.normal = min(p+2*math.Sqrt(p*(1-p)/(float64(n)+2)), 0.65)
	p0, p1 := c.normal+tolerated, c.normal+farMore
	c.up, c.down = math.Log(p1/p0), math.Log((1-p1)/(1-p0))
}

// disagrees tells whether another class is ahead of the observed one; false when the row has no score.
func disagrees(s *model.Score) (yes, ok bool) {
	return s.Margin < 0, s.Reason == model.Scored && !math.IsNaN(s.Margin)
}

// arrive takes in a fresh record's score, and tells whether the alarm was raised by it.
func (c *change) arrive(row int64, s *model.Score) bool {
	yes, ok := disagrees(s)
	if !ok {
		return false
	}
	c.seen++
	step := c.down
	if yes {
		c.disagree++
		step = c.up
	}
	if c.open {
		return false
	}
	if c.g == 0 {
		c.since = row
	}
	if c.g = max(0, c.g+step); c.g < changeLevel {
		return false
	}
	c.open, c.onset, c.atOpening, c.calm, c.caughtUp = true, c.since, c.normal, 0, false
	return true
}

// slice is called before each retrain with the oldest row of the window that the newest snapshot was fitted on; it
// judges the slice of records since then, and tells whether the breaker closes. A slice is back to normal when its
// share of disagreement is no more than tolerated above what is normal for the snapshot, and for the one at the opening,
// too; but when all rows before the change have left the window only the snapshot's own counts, as the new
// state may be a noisier one.
func (c *change) slice(oldest int64) (closed bool) {
	if !c.open || c.seen < minSlice {
		return false
	}
	most := c.normal
	if oldest < c.onset {
		most = min(most, c.atOpening)
	}
	if c.share() > most+tolerated {
		c.calm = 0
		return false
	}
	if c.calm++; c.calm < c.cooldown {
		return false
	}
	c.open, c.g = false, 0
	return true
}

// next begins a new slice.
func (c *change) next() { c.disagree, c.seen = 0, 0 }

// share is the disagreement in the slice.
func (c *change) share() float64 { return float64(c.disagree) / float64(max(1, c.seen)) }

// doubts tells whether the row came after a change that the snapshots have not caught up with.
func (c *change) doubts(row int64) bool {
	return c.open && c.calm == 0 && !c.caughtUp && row >= c.onset
}
