// Package learn trains the scorers of one fold: forests whose votes are members of the score, and linear scorers with
// the bounded loss on encoded numbers, forest leaves and kernel features.
package learn

import (
	"labelweir/model/internal/forest"
	"labelweir/model/internal/kernel"
)

// Data is the encoded window that all folds share; it is read only while they train.
type Data struct {
	Classes int
	Keys    []uint64  // N
	Dense   int       // values a dense row has, the last the constant 1
	X       []float32 // N·Dense
	Bins    *forest.Bins
	Kernels []*kernel.Map // one a kernel design; nil where it could not be made
	Smooth  [][]float32   // N·(Size+1) features of each kernel, the last the constant 1
	Labels  []int32       // N
	Source  []int32       // N, or nil without sources
	Sources int
	Workers int // goroutines of what is not done fold by fold

	// Pairs are the pairs of classes, first below second, that linear scorers tell apart; see ChoosePairs.
	Pairs [][2]int

	// Leafless is set where the leaves' weights for all pairs would take too much memory: no design then has leaves.
	Leafless bool

	// Old is, for each row, its index in the data of the fit before, or −1; nil on a cold fit.
	Old []int32
}

// Rows is the number of rows.
func (d *Data) Rows() int { return len(d.Labels) }

// Design is one arrangement of features for linear scorers.
type Design struct {
	Name    string
	Number  float64    // scale of the numbers
	Leaf    float64    // scale of the forest leaves; 0: none
	Kernel  int        // 1 + index of the kernel that stands in for the numbers; 0: none
	Lambdas [3]float64 // the λ a cold search tries
}

// Designs are the arrangements a cold search tries.
var Designs = [...]Design{
	{Name: "numbers", Number: 1, Lambdas: [3]float64{1e-4, 1e-3, 1e-2}},
	{Name: "numbers+leaves", Number: 0.7, Leaf: 0.7, Lambdas: [3]float64{1e-3, 3e-3, 1e-2}},
	{Name: "leaves", Number: 0.3, Leaf: 0.95, Lambdas: [3]float64{1e-3, 3e-3, 1e-2}},
	{Name: "kernel", Number: 1, Kernel: 1, Lambdas: [3]float64{3e-4, 1e-3, 1e-2}},
}

// Qs are the values of q a cold search tries; one graduated run serves all.
var Qs = [...]float64{-1, -0.5, 0}

// KernelGammas are the sharpnesses of the kernels, for rows of about unit length.
var KernelGammas = [...]float64{1}

// Landmarks is the most landmarks of a kernel.
const Landmarks = 192

// Setting is one linear scorer: a design, λ and q.
type Setting struct {
	Design int
	Lambda float64
	Q      float64
}

// The forests of a fold, by index.
const (
	Raw     = iota // grown on the observed labels
	Cleaned        // grown on labels drawn from what the raw forest's out-of-bag votes make of the observed ones
	Forests
)
