package loss

import (
	"math"
	"testing"
)

// margins and bounds are the grid on which the forms are compared; the kinks are on it.
var (
	grid   = []float64{-7, -2.4, -1, -.999, -.5, -.25, 0, .3, .999, 1, 1.001, 4}
	bounds = []float64{-3, -1, -.5, 0}
)

// The closed form of arXiv:1205.1148, written as the paper does.
func TestValueIsTheClosedForm(t *testing.T) {
	for _, q := range bounds {
		for _, m := range grid {
			hinge := math.Max(0, 1-m)
			if got, want := Value(q, m), math.Min((1-q)*(1-q), hinge*hinge); got != want {
				t.Errorf("L_%v(%v) = %v, want %v", q, m, got, want)
			}
		}
	}
	if got := Value(math.Inf(-1), -3); got != 16 {
		t.Errorf("unbounded loss at −3 = %v, want 16", got)
	}
	if !math.IsNaN(Value(-1, math.NaN())) {
		t.Error("a margin that is not a number must not get a number as loss")
	}
}

func TestZeroWeightsCostOne(t *testing.T) {
	for _, q := range bounds {
		if got := Value(q, 0); got != 1 {
			t.Errorf("L_%v(0) = %v, want 1", q, got)
		}
	}
}

func TestSlopeAndCurvatureMatchFiniteDifferences(t *testing.T) {
	const h = 1e-5
	for _, q := range bounds {
		for m := -4.005; m < 3; m += .07 {
			if math.Abs(m-q) < 2*h || math.Abs(m-1) < 2*h {
				continue // the loss has kinks there
			}
			first := (Value(q, m+h) - Value(q, m-h)) / (2 * h)
			if got := Slope(q, m); math.Abs(got-first) > 1e-8 {
				t.Errorf("slope of L_%v at %v = %v, differences give %v", q, m, got, first)
			}
			second := (Slope(q, m+h) - Slope(q, m-h)) / (2 * h)
			if got := Curvature(q, m); math.Abs(got-second) > 1e-6 {
				t.Errorf("curvature of L_%v at %v = %v, differences give %v", q, m, got, second)
			}
		}
	}
}

// The minimum is searched on a grid of t that contains m and 1, the only two places where a parabola can attain it.
func TestEnvelopeOfParabolasIsTheLoss(t *testing.T) {
	for _, q := range bounds {
		for _, m := range grid {
			best := math.Min(Parabola(q, m, m), Parabola(q, m, 1))
			for s := -9.; s < 9; s += .01 {
				best = math.Min(best, Parabola(q, m, s))
			}
			want := Value(q, m)
			if math.Abs(best-want) > 1e-12 {
				t.Errorf("q=%v m=%v: lowest parabola %v, loss %v", q, m, best, want)
			}
			if got := Parabola(q, m, Latent(q, m)); math.Abs(got-want) > 1e-12 {
				t.Errorf("q=%v m=%v: parabola at Latent %v, loss %v", q, m, got, want)
			}
		}
	}
}

func TestFlaggedIsTheLossAtItsBestFlag(t *testing.T) {
	for _, q := range bounds {
		for _, m := range grid {
			want := Value(q, m)
			if got := math.Min(Flagged(q, m, true), Flagged(q, m, false)); got != want {
				t.Errorf("q=%v m=%v: better flag costs %v, loss %v", q, m, got, want)
			}
			if got := Flagged(q, m, Keep(q, m)); got != want {
				t.Errorf("q=%v m=%v: Keep's flag costs %v, loss %v", q, m, got, want)
			}
		}
	}
}

// At the lower end of the interval, dropping exactly the wrong labels costs what zero weights cost.
func TestLowestQ(t *testing.T) {
	for _, rho := range []float64{.01, .1, .25, .3, .4} {
		q := LowestQ(rho)
		if got := rho * Ceiling(q); math.Abs(got-1) > 1e-12 {
			t.Errorf("share %v: dropping the wrong labels at q=%v costs %v, want 1", rho, q, got)
		}
	}
	if got := LowestQ(.25); got != -1 {
		t.Errorf("a quarter wrong gives q > %v, want −1", got)
	}
	if !math.IsInf(LowestQ(0), -1) {
		t.Error("without wrong labels q is not bounded")
	}
}

// A bias of y = +1 everywhere has margin 1 on that class and −1 on the other, which every q > −1 drops.
func TestCollapseCost(t *testing.T) {
	for _, q := range []float64{-.9, -.5, 0} {
		if got, want := CollapseCost(q, .5), .5*Value(q, 1)+.5*Value(q, -1); got != want {
			t.Errorf("q=%v: %v, the constant answer costs %v", q, got, want)
		}
	}
}
