package model

import (
	"labelweir/model/internal/encode"
	"labelweir/model/internal/fresh"
	"labelweir/model/internal/noise"
)

// payload writes everything between the head and the checksum.
func (s *Snapshot) payload(e *encoder) {
	e.facts(&s.facts)
	e.count(len(s.fields))
	for i := range s.fields {
		e.column(&s.fields[i], &s.encoder.Parts[i])
	}
	e.machine(s.machine)
	e.layer(s.layer)
	e.flush()
}

func (e *encoder) estimate(x Estimate) {
	e.f64(x.Value)
	e.f64(x.Low)
	e.f64(x.High)
	e.u64(uint64(x.Rows))
}

func (e *encoder) facts(f *Facts) {
	e.u64(uint64(f.Rows))
	e.count(len(f.Classes))
	for i, c := range f.Classes {
		e.text(c)
		e.u64(uint64(f.ClassRows[i]))
	}
	e.texts(f.Sources)
	e.text(f.Choice.Encoder)
	e.f64(f.Choice.Q)
	e.f64(f.Choice.Lambda)
	e.text(f.Choice.Why)
	e.count(len(f.Choice.Members))
	for _, m := range f.Choice.Members {
		e.text(m.Name)
		e.f64(m.Weight)
	}
	e.count(len(f.Chains))
	for _, c := range f.Chains {
		e.text(c.Name)
		e.u64(uint64(c.Tried))
		e.u64(uint64(c.Won))
		e.f64(c.MeanGap)
	}
	e.noise(&f.Noise)
	e.f64(f.Threshold)
	e.flag(f.Warm)
}

func (e *encoder) noise(n *Noise) {
	e.estimate(n.Share)
	for _, x := range n.ByClass {
		e.estimate(x)
	}
	for _, x := range n.BySource {
		e.estimate(x)
	}
	for _, row := range n.Flip {
		for _, x := range row {
			e.estimate(x)
		}
	}
	e.text(n.Model)
	e.texts(n.Unclear)
}

func (e *encoder) column(f *field, p *encode.Part) {
	e.text(f.Name)
	e.u8(uint8(f.Kind))
	e.u32(uint32(f.Size))
	if f.Kind == Category {
		e.texts(p.Levels)
		return
	}
	for i := range p.Numbers {
		u := &p.Numbers[i]
		e.count(len(u.Knots))
		for j, x := range u.Knots {
			e.f64(x)
			e.f64(u.Normal[j])
		}
		e.count(len(u.Edges))
		e.f64s(u.Edges)
		e.flag(u.Missing)
		e.f64(u.Filler)
	}
}

func (e *encoder) machine(m *fresh.Machine) {
	e.u8(uint8(len(m.Forests)))
	for i := range m.Forests {
		e.forest(&m.Forests[i])
	}
	e.u8(uint8(len(m.Kernels)))
	for i := range m.Kernels {
		k := &m.Kernels[i]
		e.f64(k.Gamma)
		e.u32(uint32(k.Dim))
		e.count(k.Size())
		e.f32s(k.Landmarks)
	}
	e.u8(uint8(len(m.Members)))
	for i := range m.Members {
		e.member(&m.Members[i])
	}
}

func (e *encoder) forest(f *fresh.Forest) {
	e.count(len(f.Nodes))
	for _, n := range f.Nodes {
		e.u16(n.Feature)
		e.u8(n.Cut)
		e.flag(n.Split)
	}
	e.count(len(f.Low))
	for c, v := range f.Low {
		e.f64(v)
		e.f64(f.Step[c])
	}
	for _, v := range f.Values {
		e.u64(v)
	}
}

func (e *encoder) member(m *fresh.Member) {
	e.u8(uint8(m.Forest + 1))
	e.u32(uint32(m.At))
	e.flag(m.Linear)
	if !m.Linear {
		return
	}
	e.u8(uint8(m.Kernel + 1))
	e.f64(m.Clip)
	e.f64(m.Scale)
	e.count(len(m.Pairs))
	for _, p := range m.Pairs {
		e.u16(uint16(p.A))
		e.u16(uint16(p.B))
		e.f64(p.Bias)
	}
	e.count(len(m.Weight))
	e.f32s(m.Weight)
	e.count(len(m.Smooth))
	e.f32s(m.Smooth)
}

func (e *encoder) layer(l *noise.Layer) {
	e.count(len(l.Models))
	for i := range l.Models {
		m := &l.Models[i]
		e.text(m.Name)
		e.f64(m.Weight)
		e.count(len(m.P.A))
		e.f64s(m.P.A)
		e.f64s(m.P.B)
		e.count(len(m.P.Slopes))
		for _, s := range m.P.Slopes {
			e.u16(uint16(s.C))
			e.u16(uint16(s.D))
			e.f64(s.Mu)
		}
		e.f64s(m.P.Flip)
		e.f64(m.P.Gamma)
		e.f64(m.P.Tau)
		e.flag(m.P.Rho != nil)
		e.count(len(m.P.Rho))
		e.f64s(m.P.Rho)
	}
	e.count(len(l.Steps))
	for _, s := range l.Steps {
		e.f64(s.At)
		e.f64(s.Share)
	}
}
