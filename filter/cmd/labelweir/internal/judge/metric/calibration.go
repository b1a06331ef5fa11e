package metric

import "math"

// Bins is the number of equal-width bins of [0,1] that calibration is measured in.
const Bins = 10

// Calibration gathers scores and truths by bin; the zero value is empty. Parts gathered apart can be merged.
type Calibration struct {
	rows  [Bins]int
	wrong [Bins]int
	sum   [Bins]float64
}

// Calibrate gathers all rows; NaN scores are left out. len(p) = len(wrong).
func Calibrate(wrong []bool, p []float64) Calibration {
	if len(p) != len(wrong) {
		panic("metric: shapes differ")
	}
	var c Calibration
	for i := range p {
		c.Add(wrong[i], p[i])
	}
	return c
}

// Add gathers one row with score p in [0,1]; a NaN is left out, anything else outside panics.
func (c *Calibration) Add(wrong bool, p float64) {
	if math.IsNaN(p) {
		return
	}
	if p < 0 || p > 1 {
		panic("metric: score is not a probability")
	}
	b := min(int(p*Bins), Bins-1)
	c.rows[b]++
	c.sum[b] += p
	if wrong {
		c.wrong[b]++
	}
}

// Merge adds what o gathered.
func (c *Calibration) Merge(o Calibration) {
	for b := range c.rows {
		c.rows[b] += o.rows[b]
		c.wrong[b] += o.wrong[b]
		c.sum[b] += o.sum[b]
	}
}

// Rows is the number of rows gathered.
func (c *Calibration) Rows() int {
	n := 0
	for _, r := range c.rows {
		n += r
	}
	return n
}

// Error is the expected calibration error: Σ over bins of share of rows × |mean score − share wrong| (Naeini, Cooper
// & Hauskrecht 2015, for the score of one event). NaN when there are no rows.
func (c *Calibration) Error() float64 {
	gap := 0.0
	for b := range c.rows {
		gap += math.Abs(c.sum[b] - float64(c.wrong[b]))
	}
	return gap / float64(c.Rows())
}

// Bin tells of bin b its rows, their mean score and their share of wrong labels; the last two are NaN without rows.
func (c *Calibration) Bin(b int) (rows int, mean, share float64) {
	n := float64(c.rows[b])
	return c.rows[b], c.sum[b] / n, float64(c.wrong[b]) / n
}
