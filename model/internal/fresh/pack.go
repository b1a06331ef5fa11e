package fresh

import (
	"math"

	"labelweir/model/internal/forest"
	"labelweir/model/internal/kernel"
	"labelweir/model/internal/learn"
)

// Source is one member of a training: the vote of forest Vote, or, where Linear is given, a linear scorer.
type Source struct {
	Vote   int
	Linear *learn.Linear
}

// Pack puts the members of a training together. Forests and kernels that no member reads are left out.
func Pack(classes, dense, bins int, members []Source, forests []*forest.Forest, kernels []*kernel.Map) *Machine {
	p := &packer{m: &Machine{Classes: classes, Dense: dense, Bins: bins}, forests: forests, kernels: kernels}
	for _, s := range members {
		p.m.Members = append(p.m.Members, p.member(s))
	}
	p.packForests()
	p.packKernels()
	for i, s := range members {
		if m := &p.m.Members[i]; s.Linear != nil {
			p.linear(m, s.Linear)
		} else {
			p.shares(m, forests[s.Vote])
		}
	}
	return p.m
}

// packer numbers what is used in the order of its first use.
type packer struct {
	m            *Machine
	forests      []*forest.Forest
	kernels      []*kernel.Map
	usedF, usedK []int   // packed index → index of forests, kernels
	width        []int   // of each packed forest
	place        [][]int // by packed forest: place in its values → leaf
}

// member says where a member finds its values, and reserves its columns.
func (p *packer) member(s Source) Member {
	m := Member{Forest: -1, Kernel: -1}
	which := s.Vote
	if s.Linear != nil {
		d := &learn.Designs[s.Linear.Design]
		m.Linear, m.Clip, m.Scale = true, learn.Clip, learn.PairScale(len(s.Linear.Pairs), p.m.Classes)
		for _, pair := range s.Linear.Pairs {
			m.Pairs = append(m.Pairs, Pair{A: pair.A, B: pair.B})
		}
		if d.Kernel > 0 {
			m.Kernel = index(&p.usedK, d.Kernel-1)
		}
		which = learn.Cleaned
		if d.Leaf == 0 {
			return m
		}
	}
	m.Forest = index(&p.usedF, which)
	if m.Forest == len(p.width) {
		p.width = append(p.width, 0)
	}
	m.At = p.width[m.Forest]
	p.width[m.Forest] += m.columns(p.m.Classes)
	return m
}

// index is the place of v in list, to whose end it is put if it is not there.
func index(list *[]int, v int) int {
	for i, x := range *list {
		if x == v {
			return i
		}
	}
	*list = append(*list, v)
	return len(*list) - 1
}

func (p *packer) packForests() {
	for i, at := range p.usedF {
		f, place := packForest(p.forests[at], p.width[i])
		p.m.Forests, p.place = append(p.m.Forests, f), append(p.place, place)
	}
}

func (p *packer) packKernels() {
	for _, at := range p.usedK {
		p.m.Kernels = append(p.m.Kernels, packKernel(p.kernels[at]))
	}
}

// shares copies the class shares of the leaves.
func (p *packer) shares(m *Member, f *forest.Forest) {
	var all []float32
	for _, t := range f.Trees {
		all = append(all, t.Shares...)
	}
	place, k := p.place[m.Forest], p.m.Classes
	for c := range k {
		p.m.Forests[m.Forest].set(m.At+c, func(l int) float64 { return float64(all[place[l]*k+c]) })
	}
}

// linear copies the weights of l with the scales of its design multiplied in.
func (p *packer) linear(m *Member, l *learn.Linear) {
	d := &learn.Designs[l.Design]
	for i := range l.Pairs {
		w := l.Pairs[i].W
		n := p.m.Dense - 1
		if m.Kernel >= 0 {
			k := p.kernels[d.Kernel-1]
			n = k.Size()
			m.Smooth = appendScaled(m.Smooth, k.Fold(w[:n]), d.Number)
		} else {
			m.Weight = appendScaled(m.Weight, w[:n], d.Number)
		}
		m.Pairs[i].Bias = w[n]
		if m.Forest >= 0 {
			f, place := &p.m.Forests[m.Forest], p.place[m.Forest]
			leaf := d.Leaf / math.Sqrt(float64(len(f.trees)))
			f.set(m.At+i, func(l int) float64 { return leaf * w[n+1+place[l]] })
		}
	}
}

func appendScaled(dst []float32, w []float64, scale float64) []float32 {
	for _, v := range w {
		dst = append(dst, float32(v*scale))
	}
	return dst
}
