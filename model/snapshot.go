package model

import (
	"labelweir/model/internal/encode"
	"labelweir/model/internal/forest"
	"labelweir/model/internal/kernel"
	"labelweir/model/internal/learn"
	"labelweir/model/internal/noise"
)

// Snapshot is one trained, immutable scorer. It may be shared between goroutines.
type Snapshot struct {
	id      string
	facts   Facts
	fields  []field
	encoder *encode.Encoder
	kernels []*kernel.Map
	forests [learn.Forests]*forest.Forest // nil where no member needs it
	plan    []member
	linear  []learn.Linear // by member; empty for votes
	layer   *noise.Layer
}

// ID is 12 hexadecimal digits of a hash over the saved bytes.
func (s *Snapshot) ID() string { return s.id }

// Facts tells what the snapshot was fitted on and what it found.
func (s *Snapshot) Facts() *Facts { return &s.facts }

// snapshot takes the scorer of fresh rows out of a training.
func (f *fitting) snapshot(layer *noise.Layer) *Snapshot {
	whole := f.folds[len(f.folds)-1]
	s := &Snapshot{fields: f.fields, encoder: f.encoder, plan: f.plan, layer: layer,
		kernels: make([]*kernel.Map, len(f.data.Kernels)), linear: make([]learn.Linear, len(f.plan))}
	for i, m := range f.plan {
		if m.forest >= 0 {
			s.forests[m.forest] = whole.Forest[m.forest]
			continue
		}
		s.linear[i] = f.linear[m.setting]
		d := &learn.Designs[m.setting.Design]
		if d.Leaf > 0 {
			s.forests[learn.Cleaned] = whole.Forest[learn.Cleaned]
		}
		if d.Kernel > 0 {
			s.kernels[d.Kernel-1] = f.data.Kernels[d.Kernel-1]
		}
	}
	return s
}
