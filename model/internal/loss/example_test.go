package loss_test

import (
	"fmt"

	"labelweir/model/internal/loss"
)

// A row that is wrong by a little pulls, one that is wrong by a lot costs a constant.
func Example() {
	for _, m := range []float64{2, .5, -.25, -10} {
		fmt.Printf("margin %5.2f: loss %.4f, slope %.2f\n", m, loss.Value(-.5, m), loss.Slope(-.5, m))
	}
	// Output:
	// margin  2.00: loss 0.0000, slope 0.00
	// margin  0.50: loss 0.2500, slope -1.00
	// margin -0.25: loss 1.5625, slope -2.50
	// margin -10.00: loss 2.2500, slope 0.00
}
