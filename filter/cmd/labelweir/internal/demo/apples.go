package demo

import (
	"math"
	"math/rand/v2"
)

// apple is one apple as it lies on the belt and as the sensors see it.
type apple struct {
	cultivar int     // index into cultivars; −1: the tag could not be read
	diameter float64 // mm
	mass     float64 // g; NaN: the scale gave nothing
	red      float64 // share of the skin that is red
	brix     float64 // sugar, degrees Brix; NaN: no reading
	firmness float64 // N
	blemish  float64 // share of the skin that is blemished
	grade    int     // index into grades: what a careful grader would say
}

// grades from best to last.
var grades = [...]string{"extra", "class-1", "class-2", "juice"}

const (
	extra = iota
	class1
	class2
	juice
)

// cultivar is an invented variety: typical size and colour, and how red it has to be for class 1.
type cultivar struct {
	name     string
	diameter float64 // mean, mm
	red      float64 // mean share
	brix     float64 // mean
	enough   float64 // least share of red for class 1
}

var cultivars = [...]cultivar{
	{"amberlea", 76, 0.35, 12.6, 0.15},
	{"hollin", 73, 0.62, 13.4, 0.40},
	{"redmoor", 79, 0.80, 12.1, 0.60},
	{"sallowby", 70, 0.50, 13.9, 0.30},
}

// pick draws one apple: its properties, the grade they call for, and then the sensors' readings of them.
func pick(rng *rand.Rand) apple {
	kind := rng.IntN(len(cultivars))
	c := cultivars[kind]
	a := apple{
		cultivar: kind,
		diameter: c.diameter + 6.5*rng.NormFloat64(),
		red:      share(logit(c.red) + 0.8*rng.NormFloat64()),
		brix:     c.brix + 0.9*rng.NormFloat64(),
		firmness: 66 + 7*rng.NormFloat64(),
		blemish:  share(-4.2 + 1.3*rng.NormFloat64()),
	}
	if rng.Float64() < 0.08 { // bruised or overripe
		a.firmness -= 22
		a.blemish = share(logit(a.blemish) + 2.5)
	}
	a.mass = 4.1e-4 * math.Pow(a.diameter, 3) * (1 + 0.03*rng.NormFloat64())
	a.grade = gradeOf(a, c)
	measure(&a, rng)
	return a
}

// gradeOf is the rule book of the line.
func gradeOf(a apple, c cultivar) int {
	switch {
	case a.blemish > 0.15 || a.firmness < 48:
		return juice
	case a.blemish > 0.06 || a.diameter < 66 || a.red < c.enough:
		return class2
	case a.diameter >= 76 && a.blemish < 0.025 && a.brix >= 12:
		return extra
	}
	return class1
}

// measure puts the sensors' errors on the properties and loses some readings.
func measure(a *apple, rng *rand.Rand) {
	a.diameter += 0.4 * rng.NormFloat64()
	a.mass += 1.5 * rng.NormFloat64()
	a.red = share(logit(a.red) + 0.08*rng.NormFloat64())
	a.brix += 0.1 * rng.NormFloat64()
	a.firmness += 0.7 * rng.NormFloat64()
	a.blemish = share(logit(a.blemish) + 0.06*rng.NormFloat64())
	if rng.Float64() < 0.04 {
		a.cultivar = -1
	}
	if rng.Float64() < 0.02 {
		a.mass = math.NaN()
	}
	if rng.Float64() < 0.05 {
		a.brix = math.NaN()
	}
}

func share(x float64) float64 { return 1 / (1 + math.Exp(-x)) }
func logit(p float64) float64 { return math.Log(p / (1 - p)) }
