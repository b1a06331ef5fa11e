package model

import "labelweir/model/internal/learn"

// heldOut are the rows a fold holds out, while scorers fitted on the other rows come in pair by pair.
type heldOut struct {
	f      *fitting
	fold   *learn.Fold
	rows   []int32
	places []int32        // of rows in scores
	of     []learn.Linear // whose scores these are; no pairs are kept in them
	scores [][]float64    // of each, by place
	pairs  []int          // pairs that came in so far
	in     learn.Input
}

func (f *fitting) holdOut(fold *learn.Fold, of []learn.Linear) *heldOut {
	h := &heldOut{f: f, fold: fold, of: of, scores: make([][]float64, len(of)), pairs: make([]int, len(of))}
	for r, at := range f.fold {
		if int(at) == fold.Number {
			h.rows = append(h.rows, int32(r))
			h.places = append(h.places, f.placeOf(int32(r)))
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
	for i, r := range h.rows {
		h.fold.Input(h.f.data, int(r), &h.in)
		v := h.of[j].Decide(&h.in, &p)
		dst := h.scores[j][int(h.places[i])*k : int(h.places[i]+1)*k]
		dst[p.A] += v
		dst[p.B] -= v
	}
}

// finish turns sums of decisions into class scores.
func (h *heldOut) finish() {
	k := h.f.data.Classes
	for j, scores := range h.scores {
		scale := learn.PairScale(h.pairs[j], k)
		for _, r := range h.places {
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
		n := f.data.Rows()
		if f.place != nil {
			n = f.placed
		}
		f.scores[set] = make([]float64, n*f.data.Classes)
	}
	return f.scores[set]
}

// narrow has scores gathered for the rows of the first folds alone, until widen: a search over 36 settings and many classes
// would not know where to put those of all rows. It returns these rows.
func (f *fitting) narrow(folds int) (rows []int32) {
	f.place = make([]int32, f.data.Rows())
	for i, at := range f.fold {
		if int(at) < folds {
			f.place[i] = int32(len(rows))
			rows = append(rows, int32(i))
		}
	}
	f.placed = len(rows)
	return rows
}

// widen makes room for all rows again in the scores that were kept.
func (f *fitting) widen(rows []int32) {
	k := f.data.Classes
	for set, few := range f.scores {
		if few == nil {
			continue
		}
		all := make([]float64, f.data.Rows()*k)
		for i, r := range rows {
			copy(all[int(r)*k:int(r+1)*k], few[i*k:(i+1)*k])
		}
		f.scores[set] = all
	}
	f.place, f.placed = nil, 0
}

// placeOf is where the scores of row r stand.
func (f *fitting) placeOf(r int32) int32 {
	if f.place == nil {
		return r
	}
	return f.place[r]
}
