package model

import (
	"fmt"

	"labelweir/model/internal/encode"
	"labelweir/model/internal/fresh"
	"labelweir/model/internal/noise"
)

// decode reads a payload and checks that its parts fit together.
func decode(payload []byte) (*Snapshot, error) {
	d := &decoder{b: payload}
	s := &Snapshot{encoder: &encode.Encoder{}, machine: &fresh.Machine{}, layer: &noise.Layer{}}
	d.facts(&s.facts)
	k := len(s.facts.Classes)
	n := d.count(4 + 1 + 4 + 4)
	s.fields, s.encoder.Parts = make([]field, n), make([]encode.Part, n)
	for i := range n {
		d.column(&s.fields[i], &s.encoder.Parts[i])
	}
	d.machine(s.machine)
	d.layer(s.layer, k)
	if d.err == nil && d.at < len(d.b) {
		d.fail(fmt.Errorf("%d bytes too many", len(d.b)-d.at))
	}
	if d.err != nil {
		return nil, d.err
	}
	return s, s.complete()
}

func (d *decoder) estimate() Estimate {
	return Estimate{Value: d.f64(), Low: d.f64(), High: d.f64(), Rows: d.whole()}
}

const estimateLen = 4 * 8

func (d *decoder) estimates(n int) []Estimate {
	if n = d.fits(n, estimateLen); n == 0 {
		return nil
	}
	out := make([]Estimate, n)
	for i := range out {
		out[i] = d.estimate()
	}
	return out
}

func (d *decoder) facts(f *Facts) {
	f.Rows = d.whole()
	for range d.count(4 + 8) {
		f.Classes = append(f.Classes, d.text())
		f.ClassRows = append(f.ClassRows, d.whole())
	}
	f.Sources = d.texts()
	f.Choice = Choice{Encoder: d.text(), Q: d.f64(), Lambda: d.f64(), Why: d.text()}
	for range d.count(4 + 8) {
		f.Choice.Members = append(f.Choice.Members, Member{Name: d.text(), Weight: d.f64()})
	}
	for range d.count(4 + 3*8) {
		f.Chains = append(f.Chains, Chain{Name: d.text(), Tried: d.whole(), Won: d.whole(), MeanGap: d.f64()})
	}
	n, k := &f.Noise, len(f.Classes)
	n.Share = d.estimate()
	n.ByClass = d.estimates(k)
	n.BySource = d.estimates(len(f.Sources))
	for range k {
		n.Flip = append(n.Flip, d.estimates(k))
	}
	n.Model = d.text()
	n.Unclear = d.texts()
	f.Threshold = d.f64()
	f.Warm = d.flag()
}

func (d *decoder) column(f *field, p *encode.Part) {
	*f = field{Name: d.text(), Kind: Kind(d.u8()), Size: int(d.u32())}
	if f.Kind == Category {
		p.Levels = d.texts()
		return
	}
	p.Numbers = make([]encode.Number, d.fits(f.Size, 4+4+1+8))
	for i := range p.Numbers {
		u := &p.Numbers[i]
		for range d.count(2 * 8) {
			u.Knots = append(u.Knots, d.finite())
			u.Normal = append(u.Normal, d.finite())
		}
		u.Edges = d.f64s(d.count(8))
		u.Missing = d.flag()
		u.Filler = d.finite()
	}
}

func (d *decoder) machine(m *fresh.Machine) {
	for range d.u8() {
		m.Forests = append(m.Forests, d.forest())
	}
	for range d.u8() {
		k := fresh.Kernel{Gamma: d.finite(), Dim: int(d.u32())}
		if n := int(d.u32()); k.Dim > 0 && n <= len(d.b)/k.Dim {
			k.Landmarks = d.f32s(n * k.Dim)
		} else {
			d.fail(fmt.Errorf("%d landmarks of %d numbers", n, k.Dim))
		}
		m.Kernels = append(m.Kernels, k)
	}
	for range d.u8() {
		m.Members = append(m.Members, d.member())
	}
}

func (d *decoder) forest() fresh.Forest {
	f := fresh.Forest{}
	f.Nodes = make([]fresh.Node, d.count(4))
	for i := range f.Nodes {
		f.Nodes[i] = fresh.Node{Feature: d.u16(), Cut: d.u8(), Split: d.flag()}
	}
	for range d.count(2 * 8) {
		f.Low, f.Step = append(f.Low, d.finite()), append(f.Step, d.finite())
	}
	words := (len(f.Low) + 3) / 4
	if leaves := f.Leaves(); leaves > 0 && words <= len(d.b)/leaves {
		f.Values = make([]uint64, d.fits(leaves*words, 8))
		for i := range f.Values {
			f.Values[i] = d.u64()
		}
	} else {
		d.fail(fmt.Errorf("%d leaves of %d values", leaves, len(f.Low)))
	}
	return f
}

func (d *decoder) member() fresh.Member {
	m := fresh.Member{Forest: int(d.u8()) - 1, At: int(d.u32()), Linear: d.flag(), Kernel: -1}
	if !m.Linear {
		return m
	}
	m.Kernel, m.Clip, m.Scale = int(d.u8())-1, d.finite(), d.finite()
	for range d.count(2 + 2 + 8) {
		m.Pairs = append(m.Pairs, fresh.Pair{A: int(d.u16()), B: int(d.u16()), Bias: d.finite()})
	}
	m.Weight = d.f32s(d.count(4))
	m.Smooth = d.f32s(d.count(4))
	return m
}

func (d *decoder) layer(l *noise.Layer, k int) {
	l.Classes = k
	for range d.count(4 + 8 + 4) {
		m := noise.Model{Name: d.text(), Weight: d.finite()}
		m.P.A = d.f64s(d.count(8))
		m.P.B = d.f64s(k)
		for range d.count(2 + 2 + 8) {
			m.P.Slopes = append(m.P.Slopes, noise.Slope{C: int(d.u16()), D: int(d.u16()), Mu: d.finite()})
		}
		m.P.Flip = d.f64s(k * k)
		m.P.Gamma, m.P.Tau = d.finite(), d.finite()
		sourced := d.flag()
		if m.P.Rho = d.f64s(d.count(8)); sourced && m.P.Rho == nil {
			m.P.Rho = []float64{}
		} else if !sourced && m.P.Rho != nil {
			d.fail(fmt.Errorf("%d source factors without sources", len(m.P.Rho)))
		}
		l.Models = append(l.Models, m)
	}
	for range d.count(2 * 8) {
		l.Steps = append(l.Steps, noise.Step{At: d.finite(), Share: d.finite()})
	}
}
