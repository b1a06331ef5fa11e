// Package chain minimises the bounded objective of one pair of classes,
//
//	J(w) = Σ ωᵢ L_q(mᵢ) + λ‖w‖²,  mᵢ = yᵢ·(w·xᵢ),  Σω = 1,
//
// by several kinds of run that start from different places. The constant 1 among the features is the bias and is
// weighted like any other. L_q is that of package loss; J(0) = 1.
//
// All runs share one inner solver, dual coordinate ascent on the rows that are kept. With the flags of the rows held,
// J is the squared hinge on the kept rows plus a constant. Its minimum has 2λw = Σ 2ωᵢξᵢyᵢxᵢ, ξ = max(0, 1−m), so
// w = Σ αᵢyᵢxᵢ with αᵢ = ωᵢξᵢ/λ ≥ 0, and the dual is
//
//	min ½‖Σ αᵢyᵢxᵢ‖² + ½ Σ (λ/ωᵢ) αᵢ² − Σ αᵢ  over α ≥ 0,
//
// whose gradient at i is G = mᵢ − 1 + αᵢλ/ωᵢ and whose exact step along i is α ← max(0, α − G/(‖x‖² + λ/ω))
// (Hsieh, Chang, Lin, Keerthi & Sundararajan 2008, algorithm 1, with D_ii = λ/ω).
//
// J compares runs at one q and one λ only.
package chain
