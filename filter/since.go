package filter

import (
	"sort"

	"labelweir/model"
	"labelweir/window"
)

// view is what the retrain that is due trains on: the window; but once the alarm for changed inputs is raised and there
// are as many labelled rows from after the change as a first fit needs, only those. Rows from before the change tell
// nothing of what labels mean now, and mixed with the new ones they would for as long as they are in the window.
//
// A change that the breaker takes back before there are that many rows was none, and the window stays whole.
func (s *slide) view() (v *window.View, cut bool) {
	v = s.win.View()
	if c := &s.breaker.change; c.open && s.since < c.onset {
		s.since, s.cutting = c.onset, false
	} else if !c.open && !s.cutting {
		s.since = 0
	}
	if s.since == 0 || len(v.Rows) == 0 || v.Rows[0] >= s.since {
		return v, s.cutting && s.since > 0
	}
	after := laterPart(v, s.since)
	labelled := int64(0)
	for _, l := range after.Table.Labels {
		if l >= 0 {
			labelled++
		}
	}
	if labelled < s.firstFit {
		return v, false
	}
	s.cutting = true
	return after, true
}

// laterPart is the part of a view from a row on. It shares the view's memory.
func laterPart(v *window.View, row int64) *window.View {
	at := sort.Search(len(v.Rows), func(i int) bool { return v.Rows[i] >= row })
	t := *v.Table
	t.Labels, t.Keys = t.Labels[at:], t.Keys[at:]
	if t.Sources != nil {
		t.Sources = t.Sources[at:]
	}
	t.Columns = make([]model.Column, len(v.Table.Columns))
	for i, c := range v.Table.Columns {
		if c.Kind == model.Category {
			c.Codes = c.Codes[at:]
		} else {
			c.Values = c.Values[at*c.Size:]
		}
		t.Columns[i] = c
	}
	left := len(v.Rows) - at
	stands := int64(float64(v.Stands)*float64(left)/float64(len(v.Rows)) + 0.5)
	return &window.View{Table: &t, Rows: v.Rows[at:], Stands: stands}
}
