package model

import (
	"cmp"
	"errors"
	"fmt"
	"slices"

	"labelweir/model/internal/noise"
)

// complete checks that the parts of a decoded snapshot fit together, so that nothing in it can lead a scorer astray, and
// derives what is not saved.
func (s *Snapshot) complete() error {
	f := &s.facts
	if len(f.Classes) < 2 || !rising(f.Classes) || !rising(f.Sources) {
		return fmt.Errorf("%d classes and %d sources, or they are not in order", len(f.Classes), len(f.Sources))
	}
	names := make(map[string]bool, len(s.fields))
	for i := range s.fields {
		c := &s.fields[i]
		if (c.Kind == Category) != (c.Size == 0) || c.Kind < Number || c.Kind > Vector {
			return fmt.Errorf("column %q: %v of %d", c.Name, c.Kind, c.Size)
		}
		if names[c.Name] {
			return fmt.Errorf("two columns %q", c.Name)
		}
		names[c.Name] = true
	}
	if err := s.encoder.Check(); err != nil {
		return err
	}
	s.machine.Classes, s.machine.Dense, s.machine.Bins = len(f.Classes), s.encoder.Dense, s.encoder.Bins
	if err := s.machine.Check(); err != nil {
		return err
	}
	return checkLayer(s.layer, len(s.machine.Members), len(f.Sources))
}

// rising tells whether values are sorted and distinct.
func rising[T cmp.Ordered](v []T) bool {
	for i := 1; i < len(v); i++ {
		if !(v[i-1] < v[i]) {
			return false
		}
	}
	return true
}

func checkLayer(l *noise.Layer, members, sources int) error {
	if len(l.Models) == 0 {
		return errors.New("no noise model")
	}
	k := l.Classes
	for i := range l.Models {
		m := &l.Models[i]
		p := &m.P
		if len(p.A) != members || len(p.B) != k || len(p.Flip) != k*k || m.Weight < 0 {
			return fmt.Errorf("noise model %q: %d weights for %d members", m.Name, len(p.A), members)
		}
		for _, s := range p.Slopes {
			if s.C >= k || s.D >= k || s.C == s.D {
				return fmt.Errorf("noise model %q: slope between classes %d and %d of %d", m.Name, s.C, s.D, k)
			}
		}
		if p.Rho != nil && len(p.Rho) != sources {
			return fmt.Errorf("noise model %q: factors of %d sources, %d known", m.Name, len(p.Rho), sources)
		}
		if p.Gamma < 0 || p.Gamma > 0 && p.Tau <= 0 {
			return fmt.Errorf("noise model %q: boundary flips γ %v, τ %v", m.Name, p.Gamma, p.Tau)
		}
	}
	if !slices.IsSortedFunc(l.Steps, func(a, b noise.Step) int { return cmp.Compare(a.At, b.At) }) {
		return errors.New("noise layer: steps do not rise")
	}
	return nil
}
