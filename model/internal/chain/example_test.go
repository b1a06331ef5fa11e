package chain_test

import (
	"fmt"
	"math/rand/v2"

	"labelweir/model/internal/chain"
)

// Eight rows on a line, one of which has the wrong label: the bounded loss drops it.
func Example() {
	at := []float32{-4, -3, -2, -1, 1, 2, 3, 4}
	p := &chain.Problem{Design: &chain.Design{N: 8, Dense: 2}, Lambda: 1e-3}
	for i, x := range at {
		p.X = append(p.X, x, 1) // the constant is the bias
		p.Rows = append(p.Rows, int32(i))
		p.Omega = append(p.Omega, 1./8)
	}
	p.Y = []int8{-1, -1, -1, -1, 1, 1, -1, 1}
	var s chain.Scratch
	st := chain.Graduated(p, nil, []float64{-.5}, rand.New(rand.NewPCG(1, 1)), &s)[0]
	fmt.Println(st.Keep)
	// Output: [true true true true true true false true]
}
