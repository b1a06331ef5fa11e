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

// mark is a point of a run that it can return to.
type mark struct {
	j         float64
	collapsed bool
	at        int // its w's name

	w     []float64
	alpha []float64
	keep  []bool
}

// note puts the last measured point, whose objective is j, in m.
func (s *Scratch) note(m *mark, j float64) {
	m.w, m.alpha, m.keep = resize(m.w, len(s.w)), resize(m.alpha, s.n), resize(m.keep, s.n)
	m.j, m.collapsed, m.at = j, s.collapsed(), s.at
	copy(m.w, s.w)
	copy(m.alpha, s.alpha)
	copy(m.keep, s.keep)
}

// take makes m the point that o is.
func (m *mark) take(o *mark) {
	m.j, m.collapsed, m.at = o.j, o.collapsed, o.at
	copy(m.w, o.w)
	copy(m.alpha, o.alpha)
	copy(m.keep, o.keep)
}

// jump goes to m.
func (s *Scratch) jump(m *mark) {
	if s.at != m.at {
		s.at = m.at
		copy(s.w, m.w)
	}
	copy(s.alpha, m.alpha)
	copy(s.keep, m.keep)
}

// remember makes the last measured point, whose objective is j, the best one.
func (s *Scratch) remember(j float64) { s.note(&s.best, j) }

// consider remembers the last measured point if it is better than the best: one that has not collapsed is better than
// one that has, and among like points the lower J is.
func (s *Scratch) consider(j float64) {
	c := s.collapsed()
	if c == s.best.collapsed && j < s.best.j || !c && s.best.collapsed {
		s.remember(j)
	}
}

// recall goes back to the best point.
func (s *Scratch) recall() { s.jump(&s.best) }

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
