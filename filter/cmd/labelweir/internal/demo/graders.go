package demo

import "math/rand/v2"

// grader is one of the people at the belt, all invented: how often a grade is mistaken for one beside it, and whether
// class 2 begins to pass as class 1 halfway through.
type grader struct {
	name     string
	slip     float64 // chance that an apple gets the grade above or below its own
	confuses float64 // in the second half: chance that class 2 is called class 1, and half as often the other way
}

var graders = [...]grader{
	{"grader-a", 0.01, 0},
	{"grader-b", 0.02, 0},
	{"grader-c", 0.01, 0},
	{"grader-d", 0.05, 0},
	{"grader-e", 0.01, 0.45},
}

// call gives the grade that g writes down for an apple of the true grade.
func (g grader) call(grade int, secondHalf bool, rng *rand.Rand) int {
	slip, up, confusion := rng.Float64() < g.slip, rng.Float64() < 0.5, rng.Float64()
	if secondHalf {
		switch {
		case grade == class2 && confusion < g.confuses:
			return class1
		case grade == class1 && confusion < g.confuses/2:
			return class2
		}
	}
	switch {
	case !slip:
		return grade
	case grade == extra:
		return class1
	case grade == juice:
		return class2
	case up:
		return grade - 1
	}
	return grade + 1
}
