package model

import (
	"math/rand/v2"
	"slices"

	"labelweir/model/internal/encode"
	"labelweir/model/internal/forest"
	"labelweir/model/internal/kernel"
	"labelweir/model/internal/learn"
)

// encode fits the encoder and the kernels on the used rows and encodes all of them.
func (in *intake) encode(t *Table, seed uint64) {
	cols := in.columns(t)
	in.encoder = encode.Fit(cols, len(in.rows))
	in.allocate()
	for i := range in.rows {
		in.encodeRow(cols, i)
	}
	d, n := in.data, len(in.rows)
	d.Kernels = make([]*kernel.Map, len(learn.KernelGammas))
	for j, gamma := range learn.KernelGammas {
		d.Kernels[j] = kernel.New(d.X, n, d.Dense, d.Dense-1, learn.Landmarks, gamma, rand.New(rand.NewPCG(seed, 1<<32+uint64(j))))
	}
	in.smooth(func(int) int32 { return -1 }, nil)
	in.transpose()
}

// carry encodes with the encoder and kernels of an earlier intake; what it had encoded is copied.
func (in *intake) carry(t *Table, last *intake) {
	at := make(map[uint64]int32, len(last.data.Keys))
	for i, k := range last.data.Keys {
		at[k] = int32(i)
	}
	d, was := in.data, last.data
	d.Old = make([]int32, len(in.rows))
	in.encoder, d.Kernels, d.Pairs = last.encoder, was.Kernels, was.Pairs
	in.allocate()
	cols := in.columns(t)
	for i, k := range d.Keys {
		old, ok := at[k]
		if !ok {
			d.Old[i] = -1
			in.encodeRow(cols, i)
			continue
		}
		d.Old[i] = old
		copy(d.X[i*d.Dense:(i+1)*d.Dense], was.X[int(old)*d.Dense:])
		copy(d.Bins.Row(i), was.Bins.Row(int(old)))
	}
	in.smooth(func(i int) int32 { return d.Old[i] }, was)
	in.transpose()
}

// continues tells whether a training on in can start from one on last.
func (in *intake) continues(last *intake) bool {
	if !slices.Equal(in.classes, last.classes) || len(in.fields) != len(last.fields) {
		return false
	}
	for i := range in.fields {
		a, b := &in.fields[i], &last.fields[i]
		if a.Name != b.Name || a.Kind != b.Kind || a.Size != b.Size {
			return false
		}
	}
	return true
}

func (in *intake) columns(t *Table) []encode.Input {
	cols := make([]encode.Input, len(t.Columns))
	for k := range t.Columns {
		cols[k] = gather(&t.Columns[k], in.rows)
	}
	return cols
}

func (in *intake) allocate() {
	d, n := in.data, len(in.rows)
	d.Dense = in.encoder.Dense
	d.X = make([]float32, n*d.Dense)
	d.Bins = &forest.Bins{N: n, D: in.encoder.Bins, Rows: make([]uint8, n*in.encoder.Bins)}
}

func (in *intake) encodeRow(cols []encode.Input, i int) {
	d := in.data
	in.encoder.Row(cols, i, 1, d.X[i*d.Dense:(i+1)*d.Dense], d.Bins.Row(i))
}

// smooth computes the kernel features; old(i) is row i's place in was, −1 for a new one. Landmarks are drawn without
// looking at labels, so all folds share them.
func (in *intake) smooth(old func(i int) int32, was *learn.Data) {
	d, n := in.data, len(in.rows)
	d.Smooth = make([][]float32, len(d.Kernels))
	for j, m := range d.Kernels {
		if m == nil {
			continue
		}
		w := m.Size() + 1
		x, scratch := make([]float32, n*w), make([]float64, m.Size())
		for i := range n {
			if o := int(old(i)); o >= 0 {
				copy(x[i*w:(i+1)*w], was.Smooth[j][o*w:])
				continue
			}
			m.Features(d.X[i*d.Dense:(i+1)*d.Dense], x[i*w:(i+1)*w-1], scratch)
			x[(i+1)*w-1] = 1
		}
		d.Smooth[j] = x
	}
}

// transpose fills the columns of the bins.
func (in *intake) transpose() {
	b := in.data.Bins
	b.Cols = make([][]uint8, b.D)
	all := make([]uint8, b.N*b.D)
	for j := range b.Cols {
		col := all[j*b.N : (j+1)*b.N : (j+1)*b.N]
		for i := range col {
			col[i] = b.Rows[i*b.D+j]
		}
		b.Cols[j] = col
	}
}
