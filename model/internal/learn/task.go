// Package learn trains the scorers of one fold: forests whose votes are members of the score, and linear scorers with
// the bounded loss on encoded numbers and forest leaves.
package learn

import (
	"labelweir/model/internal/forest"
	"labelweir/model/internal/kernel"
)

// Data is the encoded window that all folds share; it is read only.
type Data struct {
	Classes int
	Dense   int       // values a dense row has, the last the constant 1
	X       []float32 // N·Dense at scale 1
	Bins    *forest.Bins
	Kernels []*kernel.Map // of the kernel designs; nil where there is none
	Smooth  [][]float32   // N·(Size+1) features of each kernel, the last the constant 1
	Labels  []int32       // N
	Source  []int32       // N or nil
	Sources int
}

// Rows is the number of rows.
func (d *Data) Rows() int { return len(d.Labels) }

// Design names a block arrangement of the linear scorers.
type Design struct {
	Name   string
	Number float64 // scale of the dense block
	Leaf   float64 // scale of the leaf block; 0: no leaves
	Forest int     // index of the forest whose leaves it takes
	Kernel int     // 1 + index of the kernel that replaces the dense block; 0: none

	Lambdas [3]float64 // the λ a cold search tries
}

// Setting is one linear scorer to fit.
type Setting struct {
	Design int
	Lambda float64
	Q      float64
}

// The forests of a fold, by index.
const (
	Raw     = iota // grown on the observed labels
	Cleaned        // grown on labels cleaned by the raw forest's out-of-bag votes
	Shallow        // as Cleaned, but shallow with larger leaves
	forests
)

// Designs are the block arrangements there are.
var designs = [...]Design{
	{Name: "numbers", Number: 1, Lambdas: [3]float64{1e-4, 1e-3, 1e-2}},
	{Name: "numbers+leaves", Number: 0.7, Leaf: 0.7, Forest: Shallow, Lambdas: [3]float64{1e-3, 3e-3, 1e-2}},
	{Name: "leaves", Number: 0.3, Leaf: 0.95, Forest: Cleaned, Lambdas: [3]float64{1e-3, 3e-3, 1e-2}},
	{Name: "kernel", Number: 1, Kernel: 1, Lambdas: [3]float64{1e-4, 1e-3, 1e-2}},
	{Name: "wide kernel", Number: 1, Kernel: 2, Lambdas: [3]float64{1e-4, 1e-3, 1e-2}},
}

// KernelGammas are the sharpnesses of the kernel designs, for rows of about unit length.
var KernelGammas = [...]float64{2, 0.5}

// Landmarks is the most landmarks of a kernel.
const Landmarks = 192

// Designs gives the block arrangements there are.
func Designs() []Design { return designs[:] }
