package table

import (
	"sync"

	"labelweir/model"
)

// tray is the memory of one batch's table, used again for a later batch once this one is released.
type tray struct {
	table model.Table
	times []int64
}

// trays are those that are free. Batches are released by whoever has written them, on another goroutine.
type trays struct {
	mu   sync.Mutex
	free []*tray
}

// mostTrays bounds what is kept: a pipeline has a few batches under way.
const mostTrays = 16

// get gives a tray for so many features; what it holds is of no meaning.
func (p *trays) get(features int) *tray {
	p.mu.Lock()
	defer p.mu.Unlock()
	if n := len(p.free); n > 0 {
		t := p.free[n-1]
		p.free = p.free[:n-1]
		return t
	}
	return &tray{table: model.Table{Columns: make([]model.Column, features)}}
}

// put takes a tray back.
func (p *trays) put(t *tray) {
	p.mu.Lock()
	defer p.mu.Unlock()
	if len(p.free) < mostTrays {
		p.free = append(p.free, t)
	}
}

// drop lets the free ones go.
func (p *trays) drop() {
	p.mu.Lock()
	defer p.mu.Unlock()
	p.free = nil
}

// emptied is s without elements, with room for n.
func emptied[T any](s []T, n int) []T {
	if cap(s) < n {
		return make([]T, 0, n)
	}
	return s[:0]
}
