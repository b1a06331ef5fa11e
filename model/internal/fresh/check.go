package fresh

import (
	"errors"
	"fmt"
)

// Limits of what may be loaded; a packed machine is far below them.
const maxClasses = 1 << 16

// Check tells whether a loaded machine is one that Score can run on any row without leaving its tables or running in
// circles, and derives what is not saved. Numbers must be finite already.
func (m *Machine) Check() error {
	if m.Classes < 2 || m.Classes > maxClasses {
		return fmt.Errorf("%d classes", m.Classes)
	}
	for i := range m.Forests {
		if err := m.Forests[i].check(m.Bins); err != nil {
			return fmt.Errorf("forest %d: %w", i, err)
		}
	}
	for i := range m.Kernels {
		k := &m.Kernels[i]
		if k.Dim < 1 || k.Dim > m.Dense-1 || len(k.Landmarks) == 0 || len(k.Landmarks)%k.Dim != 0 || k.Gamma < 0 {
			return fmt.Errorf("kernel %d: γ %v, %d numbers of landmarks for rows of %d of %d", i, k.Gamma, len(k.Landmarks), k.Dim, m.Dense-1)
		}
		k.prepare()
	}
	if len(m.Members) == 0 {
		return errors.New("no members")
	}
	taken := make([]int, len(m.Forests)) // columns of each forest that have an owner
	for i := range m.Members {
		if err := m.checkMember(&m.Members[i], taken); err != nil {
			return fmt.Errorf("member %d: %w", i, err)
		}
	}
	for i, n := range taken {
		if w := len(m.Forests[i].Low); n != w {
			return fmt.Errorf("forest %d: leaves of %d values, %d of them used", i, w, n)
		}
	}
	return nil
}

// check derives the form that walks read and looks at what it cannot see.
func (f *Forest) check(bins int) error {
	if err := f.prepare(); err != nil {
		return err
	}
	if err := f.checkValues(); err != nil {
		return err
	}
	for i, n := range f.Nodes {
		if n.Split && int(n.Feature) >= bins {
			return fmt.Errorf("node %d splits bin %d of %d", i, n.Feature, bins)
		}
	}
	return nil
}

func (m *Machine) checkMember(p *Member, taken []int) error {
	if p.Forest < -1 || p.Forest >= len(m.Forests) || p.Kernel < -1 || p.Kernel >= len(m.Kernels) {
		return fmt.Errorf("forest %d of %d, kernel %d of %d", p.Forest, len(m.Forests), p.Kernel, len(m.Kernels))
	}
	if p.Forest >= 0 {
		if p.At != taken[p.Forest] {
			return fmt.Errorf("leaf values from %d on, %d are next", p.At, taken[p.Forest])
		}
		taken[p.Forest] += p.columns(m.Classes)
	} else if !p.Linear || p.At != 0 {
		return errors.New("leaf values without a forest")
	}
	if !p.Linear {
		return nil
	}
	if p.Clip < 0 || len(p.Pairs) == 0 {
		return fmt.Errorf("%d pairs, clipped at %v", len(p.Pairs), p.Clip)
	}
	for _, ab := range p.Pairs {
		if ab.A < 0 || ab.B < 0 || ab.A >= m.Classes || ab.B >= m.Classes || ab.A == ab.B {
			return fmt.Errorf("pair of classes %d and %d of %d", ab.A, ab.B, m.Classes)
		}
	}
	n, w := len(p.Pairs)*(m.Dense-1), 0
	if p.Kernel >= 0 {
		n, w = 0, len(p.Pairs)*m.Kernels[p.Kernel].Size()
	}
	if len(p.Weight) != n || len(p.Smooth) != w {
		return fmt.Errorf("%d and %d weights, %d and %d expected", len(p.Weight), len(p.Smooth), n, w)
	}
	return nil
}
