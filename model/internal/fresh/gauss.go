package fresh

import "math"

// wide is the number of landmarks whose distances are computed side by side; Kernel.across and Kernel.norm are filled up
// to a multiple of it.
const wide = 32

// distancesPlain writes norm_j + Σ_i u_i·across_ij to dst. across holds, for each wide landmarks, number after number of
// all of them. Here and below float32(…) keeps products from being fused with sums, so that every machine computes the same.
func distancesPlain(dst, norm, across, u []float32) {
	copy(dst, norm)
	for b := 0; b < len(dst); b += wide {
		to := dst[b : b+wide]
		for i, v := range u {
			if v == 0 {
				continue
			}
			for j, a := range across[(b/wide*len(u)+i)*wide:][:wide] {
				to[j] += float32(v * a)
			}
		}
	}
}

// farthest is where exp(−y) is about the smallest float32 of full precision; beyond it counts as 0.
const farthest = 87

// gauss are farthest, 1/ln 2, ½, ln 2, and the coefficients of r⁶ to r² and of r⁰ of the series of exp(−r).
func gauss() [10]float32 {
	return [10]float32{farthest, 1 / math.Ln2, 0.5, math.Ln2, 1. / 720, -1. / 120, 1. / 24, -1. / 6, 0.5, 1}
}

// decaysPlain replaces every y of dst by exp(−y − add) with a relative error below 5·10⁻⁶, as 2⁻ⁿ·exp(−r) with
// |r| ≤ ½·ln 2. Sums below 0, which only rounding brings about, and NaN count as 0.
func decaysPlain(dst []float32, add float32, s *[10]float32) {
	for j, y := range dst {
		y += add
		if !(y > 0) {
			y = 0
		}
		if y > s[0] {
			dst[j] = 0
			continue
		}
		t := y * s[1]
		n := int32(float32(t) + s[2])
		r := float32(t-float32(n)) * s[3]
		p := s[4]
		for _, c := range s[5:9] {
			p = float32(p*r) + c
		}
		p = float32(p*r) - s[9]
		p = float32(p*r) + s[9]
		dst[j] = math.Float32frombits(math.Float32bits(p) - uint32(n)<<23)
	}
}
