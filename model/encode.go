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
	cols := columns(t)
	in.encoder = encode.Fit(cols, in.rows)
	in.allocate()
	d, n := in.data, len(in.rows)
	in.bind(cols)
	in.encoder.Block(cols, in.rows, d.X, d.Bins.Rows)
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
	in.encoder, d.Kernels, d.Pairs, d.Leafless = last.encoder, was.Kernels, was.Pairs, was.Leafless
	in.allocate()
	var news []int32
	for i, k := range d.Keys {
		old, ok := at[k]
		if !ok {
			d.Old[i] = -1
			news = append(news, int32(i))
			continue
		}
		d.Old[i] = old
		copy(d.X[i*d.Dense:(i+1)*d.Dense], was.X[int(old)*d.Dense:])
		copy(d.Bins.Row(i), was.Bins.Row(int(old)))
	}
	in.encodeNew(t, news)
	in.smooth(func(i int) int32 { return d.Old[i] }, was)
	in.transpose()
}

// continues tells whether a training on in can start from one on last.
func (in *intake) continues(last *intake) bool {
	return slices.Equal(in.classes, last.classes) && slices.Equal(in.fields, last.fields)
}

// columns are those of t as the encoder sees them.
func columns(t *Table) []encode.Input {
	cols := make([]encode.Input, len(t.Columns))
	for k := range t.Columns {
		c := &t.Columns[k]
		if c.Kind == Category {
			cols[k] = encode.Input{Codes: c.Codes, Levels: c.Levels}
		} else {
			cols[k] = encode.Input{Size: c.Size, Values: c.Values}
		}
	}
	return cols
}

// bind says which slots the columns' category codes have.
func (in *intake) bind(cols []encode.Input) {
	for k := range cols {
		cols[k].Slots = in.encoder.Parts[k].Bind(nil, cols[k].Levels)
	}
}

func (in *intake) allocate() {
	d, n := in.data, len(in.rows)
	d.Dense = in.encoder.Dense
	d.X = make([]float32, n*d.Dense)
	d.Bins = &forest.Bins{N: n, D: in.encoder.Bins, Rows: make([]uint8, n*in.encoder.Bins)}
}

// encodeNew encodes the listed used rows.
func (in *intake) encodeNew(t *Table, news []int32) {
	d, e := in.data, in.encoder
	cols := columns(t)
	in.bind(cols)
	at := make([]int32, len(news))
	for j, i := range news {
		at[j] = in.rows[i]
	}
	x, bins := make([]float32, len(news)*e.Dense), make([]uint8, len(news)*e.Bins)
	e.Block(cols, at, x, bins)
	for j, i := range news {
		copy(d.X[int(i)*e.Dense:], x[j*e.Dense:(j+1)*e.Dense])
		copy(d.Bins.Row(int(i)), bins[j*e.Bins:])
	}
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
