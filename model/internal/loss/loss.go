// Package loss is the bounded squared hinge that the model is trained with, in the three forms in which it is used:
// the value, the pieces a second-order step needs, and the envelope of parabolas with one latent variable a row.
//
// With margin m = y·(w·x) and a bound parameter q ≤ 0,
//
//	L_q(m) = min[(1−q)², max(0, 1−m)²]
//
// so a row whose margin is at or below q costs a constant and no longer pulls. q = −Inf gives the plain convex squared
// hinge. The loss is that of "Robust classification with adiabatic quantum optimization", ICML 2012, arXiv:1205.1148.
package loss

import "math"

// Value is L_q(m). A NaN in m gives NaN.
func Value(q, m float64) float64 {
	if m >= 1 {
		return 0
	}
	if m <= q {
		return Ceiling(q)
	}
	return (1 - m) * (1 - m)
}

// Ceiling is (1−q)², the cost of a row that is dropped and the largest value of the loss; +Inf for q = −Inf.
func Ceiling(q float64) float64 { return (1 - q) * (1 - q) }

// Slope is dL_q/dm: −2(1−m) between q and 1, zero outside. At the kink m = q it is the zero of the dropped side.
func Slope(q, m float64) float64 {
	if m >= 1 || m <= q {
		return 0
	}
	return -2 * (1 - m)
}

// Curvature is the Gauss–Newton term of L_q, the second derivative of the squared residual 1−m with respect to m:
// 2 between q and 1, zero outside. It is never negative, so a step built from it is a descent direction.
func Curvature(q, m float64) float64 {
	if m >= 1 || m <= q {
		return 0
	}
	return 2
}

// Keep is the latent flag that attains the envelope: whether a row of margin m is still fitted rather than dropped.
func Keep(q, m float64) bool { return m > q }

// Flagged is the loss of a row whose flag is held: the squared hinge when kept, the ceiling when dropped. Its minimum
// over keep is Value.
func Flagged(q, m float64, keep bool) float64 {
	if !keep {
		return Ceiling(q)
	}
	return Value(math.Inf(-1), m)
}

// Parabola is (m−t)² + (1−q)²·[t < 1], the quadratic in m with latent variable t whose minimum over t is L_q(m)
// (the variational form of arXiv:1205.1148).
func Parabola(q, m, t float64) float64 {
	if t < 1 {
		return (m-t)*(m-t) + Ceiling(q)
	}
	return (m - t) * (m - t)
}

// Latent is a t at which Parabola attains its minimum L_q(m): m itself where the row is right by more than 1 or is
// dropped, 1 between.
func Latent(q, m float64) float64 {
	if m >= 1 || m <= q {
		return m
	}
	return 1
}
