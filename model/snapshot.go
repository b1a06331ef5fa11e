package model

import (
	"labelweir/model/internal/encode"
	"labelweir/model/internal/fresh"
	"labelweir/model/internal/noise"
)

// Snapshot is one trained, immutable scorer. It may be shared between goroutines.
type Snapshot struct {
	id      string
	facts   Facts
	fields  []field
	encoder *encode.Encoder // a part for each field
	machine *fresh.Machine
	layer   *noise.Layer
}

// ID is 12 hexadecimal digits of a hash over the saved bytes.
func (s *Snapshot) ID() string { return s.id }

// Facts tells what the snapshot was fitted on and what it found.
func (s *Snapshot) Facts() *Facts { return &s.facts }

// snapshot takes the scorer of fresh rows out of a training.
func (f *fitting) snapshot(layer *noise.Layer) *Snapshot {
	whole := f.folds[len(f.folds)-1]
	members := make([]fresh.Source, len(f.plan))
	for i, m := range f.plan {
		members[i].Vote = m.forest
		if m.forest < 0 {
			l := f.linear[m.setting]
			members[i].Linear = &l
		}
	}
	return &Snapshot{fields: f.fields, encoder: f.encoder, layer: layer,
		machine: fresh.Pack(f.data.Classes, f.encoder.Dense, f.encoder.Bins, members, whole.Forest[:], f.data.Kernels)}
}
