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
		if n != m.Forests[i].Width {
			return fmt.Errorf("forest %d: leaves of %d values, %d of them used", i, m.Forests[i].Width, n)
		}
	}
	return nil
}

// check walks the table once: a split's children lie behind it and within its tree, each leaf is met once, in no other
// tree.
func (f *Forest) check(bins int) error {
	if len(f.Roots) == 0 || f.Roots[0] != 0 || f.Width < 1 {
		return fmt.Errorf("%d trees, leaves of %d values", len(f.Roots), f.Width)
	}
	leaves := f.Leaves()
	if len(f.Values) != leaves*f.Width {
		return fmt.Errorf("%d leaves of %d values, %d values", leaves, f.Width, len(f.Values))
	}
	seen := make([]bool, leaves)
	for t, root := range f.Roots {
		end := int32(len(f.Nodes))
		if t+1 < len(f.Roots) {
			end = f.Roots[t+1]
		}
		if root < 0 || root >= end || int(end) > len(f.Nodes) {
			return fmt.Errorf("tree %d lies from node %d to %d of %d", t, root, end, len(f.Nodes))
		}
		if err := f.checkTree(root, end, bins, seen); err != nil {
			return fmt.Errorf("tree %d: %w", t, err)
		}
	}
	return nil
}

// checkTree wants the nodes of a tree in the order in which their parents name them, which leaves no other tree that
// shares them and no way round.
func (f *Forest) checkTree(root, end int32, bins int, seen []bool) error {
	next := root + 1
	for i := root; i < end; i++ {
		n := &f.Nodes[i]
		if n.Child >= 0 {
			if n.Child != next || n.Child > end-2 || int(n.Feature) >= bins {
				return fmt.Errorf("node %d splits bin %d of %d into nodes %d and %d", i, n.Feature, bins, n.Child, int64(n.Child)+1)
			}
			next += 2
			continue
		}
		leaf := ^n.Child
		if int(leaf) >= len(seen) || seen[leaf] {
			return fmt.Errorf("node %d is leaf %d of %d, or not alone so", i, leaf, len(seen))
		}
		seen[leaf] = true
	}
	if next != end {
		return fmt.Errorf("nodes to %d, splits lead to %d", end, next)
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
