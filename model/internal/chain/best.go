package chain

// collapseBelow is the share of a class's weight that has to be kept. Dropping one whole class and calling every row
// the other costs half of (1−q)² however the rows lie, which at q near 0 is less than any useful solution of a hard
// problem costs: a low J then says nothing. More than three wrong labels in four of a class can't be told from a
// class of another name, so such points are not solutions anyone wants.
const collapseBelow = 0.25

// collapsed tells whether the last measured point drops most of a class.
func (s *Scratch) collapsed() bool {
	return s.kept[0] < collapseBelow || s.kept[1] < collapseBelow
}

// remember makes the last measured point, whose objective is j, the best one.
func (s *Scratch) remember(j float64) {
	s.best.j, s.best.collapsed, s.best.at = j, s.collapsed(), s.at
	copy(s.best.w, s.w)
	copy(s.best.alpha, s.alpha)
	copy(s.best.keep, s.keep)
}

// consider remembers the last measured point if it is better than the best: one that has not collapsed is better than
// one that has, and among like points the lower J is.
func (s *Scratch) consider(j float64) {
	c := s.collapsed()
	if c == s.best.collapsed && j < s.best.j || !c && s.best.collapsed {
		s.remember(j)
	}
}

// recall goes back to the best point.
func (s *Scratch) recall() {
	if s.at != s.best.at {
		s.at = s.best.at
		copy(s.w, s.best.w)
	}
	copy(s.alpha, s.best.alpha)
	copy(s.keep, s.best.keep)
}

// end is the best point as a state.
func (s *Scratch) end(q float64, status Status) State {
	s.recall()
	return s.state(q, s.best.j, s.best.collapsed, status)
}

// Less tells whether a is the better end of a run at the same q and λ: one that has not collapsed before one that
// has, then the lower J.
func Less(a, b *State) bool {
	if a.Collapsed != b.Collapsed {
		return b.Collapsed
	}
	return a.J < b.J
}

// Best is the index of the best state. The running one, by index or −1 for none, stays unless another's J is lower by
// more than the share hysteresis of it: two bottoms of equal depth must not make scores jump at every retrain.
func Best(states []State, running int, hysteresis float64) int {
	best := 0
	for k := range states {
		if Less(&states[k], &states[best]) {
			best = k
		}
	}
	if running >= 0 && holds(&states[running], &states[best], hysteresis) {
		return running
	}
	return best
}

// holds tells whether the running state stays although best is at least as good.
func holds(running, best *State, hysteresis float64) bool {
	return running.Collapsed == best.Collapsed && best.J >= running.J*(1-hysteresis)
}
