package model

import "labelweir/model/internal/learn"

// heldOut are the rows a fold holds out, while scorers fitted on the other rows come in pair by pair.
type heldOut struct {
	f      *fitting
	fold   *learn.Fold
	rows   []int32
	of     []learn.Linear // whose scores these are; no pairs are kept in them
	scores [][]float64    // of each, N·K
	pairs  []int          // pairs that came in so far
	in     learn.Input
}

func (f *fitting) holdOut(fold *learn.Fold, of []learn.Linear) *heldOut {
	h := &heldOut{f: f, fold: fold, of: of, scores: make([][]float64, len(of)), pairs: make([]int, len(of))}
	for r, at := range f.fold {
		if int(at) == fold.Number {
			h.rows = append(h.rows, int32(r))
		}
	}
	return h
}

// add adds the decisions of one pair to the scores of scorer j.
func (h *heldOut) add(j int, p learn.Pair) {
	if h.pairs[j]++; h.scores[j] == nil {
		h.scores[j] = h.f.scoresOf(h.of[j].Setting)
	}
	k := h.f.data.Classes
	for _, r := range h.rows {
		h.fold.Input(h.f.data, int(r), &h.in)
		v := h.of[j].Decide(&h.in, &p)
		dst := h.scores[j][int(r)*k : (int(r)+1)*k]
		dst[p.A] += v
		dst[p.B] -= v
	}
}

// finish turns sums of decisions into class scores.
func (h *heldOut) finish() {
	k := h.f.data.Classes
	for j, scores := range h.scores {
		scale := learn.PairScale(h.pairs[j], k)
		for _, r := range h.rows {
			if scores != nil {
				for c := range scores[int(r)*k : (int(r)+1)*k] {
					scores[int(r)*k+c] *= scale
				}
			}
		}
	}
}

// scoresOf is where the scores of one setting are gathered; folds write to rows of their own.
func (f *fitting) scoresOf(set learn.Setting) []float64 {
	f.mu.Lock()
	defer f.mu.Unlock()
	if f.scores[set] == nil {
		f.scores[set] = make([]float64, f.data.Rows()*f.data.Classes)
	}
	return f.scores[set]
}
