package filtertest

import (
	"context"
	"errors"
	"io"
	"slices"
	"strings"
	"testing"

	"labelweir/filter"
	"labelweir/model"
)

// slab is a source of three batches of four rows in memory. Its flaw, if any, breaks one behaviour.
type slab struct {
	flaw    string
	batch   int
	values  []float64
	levels  []string
	reading int
}

func opener(flaw string) func() (filter.Source, error) {
	reading := 0
	return func() (filter.Source, error) {
		reading++
		return &slab{flaw: flaw, values: make([]float64, 4), levels: make([]string, 0, 9), reading: reading}, nil
	}
}

func (s *slab) Next(ctx context.Context) (*filter.Batch, error) {
	if ctx.Err() != nil && s.flaw != "deaf" {
		return nil, ctx.Err()
	}
	if s.batch == 3 {
		if s.flaw == "restart" {
			s.batch = 0
		}
		return nil, io.EOF
	}
	first := int64(4 * s.batch)
	if s.flaw != "shared values" {
		s.values = make([]float64, 4)
	}
	for i := range s.values {
		s.values[i] = float64(first) + float64(i)
		if s.flaw == "moody" {
			s.values[i] += float64(s.reading)
		}
	}
	s.levels = append(s.levels, string(rune('a'+s.batch)))
	if s.flaw == "renamed" {
		s.levels[0] = s.levels[len(s.levels)-1] + "!"
	}
	t := &model.Table{Labels: []int32{0, -1, 0, 0}, Classes: []string{"ripe"}, Keys: make([]uint64, 4), Columns: []model.Column{
		{Name: "x", Kind: model.Number, Size: 1, Values: s.values},
		{Name: "c", Kind: model.Category, Size: 1, Codes: []int32{0, -1, int32(s.batch), 0}, Levels: s.levels[:len(s.levels):len(s.levels)]}}}
	for i := range t.Keys {
		t.Keys[i] = model.Key(first + int64(i))
	}
	b := &filter.Batch{First: first, Table: t, Release: func() {}}
	switch s.flaw {
	case "gap":
		b.First++
	case "odd code":
		t.Columns[1].Codes[0] = 7
	case "short":
		t.Columns[0].Values = s.values[:3]
	}
	s.batch++
	return b, nil
}

func (s *slab) Close() error {
	if s.flaw == "wipes" {
		clear(s.values)
	}
	return nil
}

func TestASoundSourcePasses(t *testing.T) { Source(t, opener("")) }

func TestEachFlawOfASourceIsFound(t *testing.T) {
	for flaw, where := range map[string]string{
		"gap": "without gaps", "odd code": "consistent", "short": "consistent", "renamed": "only grow", "moody": "two readings",
		"shared values": "share memory", "wipes": "stay valid", "restart": "end stays", "deaf": "context",
	} {
		found(t, flaw, where, CheckSource(opener(flaw)))
	}
}

func TestABatchNeedsARelease(t *testing.T) {
	if err := CheckBatch(&filter.Batch{Table: &model.Table{}}); err == nil || !strings.Contains(err.Error(), "Release") {
		t.Errorf("got %v", err)
	}
}

func found(t *testing.T, flaw, where string, faults []error) {
	t.Helper()
	if !slices.ContainsFunc(faults, func(err error) bool { return strings.Contains(err.Error(), where) }) {
		t.Errorf("%s: found %v, want a fault about %q", flaw, faults, where)
	}
}

// shelf is where crate sinks put what they commit.
type shelf struct {
	flaw         string
	tagged, held []Tagged
	there        bool
	left         string
}

type crate struct {
	to           *shelf
	tagged, held []Tagged
	lent         []filter.Tag // flaw: kept from the last call
	at           int64
	state        int // 1 committed, 2 closed
}

func (c *crate) Deliver(ctx context.Context, b *filter.Batch, tags []filter.Tag) error {
	if c.to.flaw != "deaf" && ctx.Err() != nil {
		return ctx.Err()
	}
	if c.state != 0 && c.to.flaw != "late" {
		return errors.New("closed")
	}
	if c.to.flaw == "keeps" {
		c.lent, c.at = tags, b.First
	}
	for i, tag := range tags {
		row := Tagged{b.First + int64(i), tag}
		switch {
		case c.to.flaw == "loses" && i == 3:
		case c.to.flaw == "mixes" && i == 1 || !tag.Divert:
			c.tagged = append(c.tagged, row)
		default:
			c.held = append(c.held, row)
		}
	}
	if c.to.flaw == "eager" {
		c.to.there = true
	}
	return nil
}

func (c *crate) Commit(ctx context.Context) error {
	if ctx.Err() != nil {
		return ctx.Err()
	}
	for i, tag := range c.lent {
		if i < len(c.tagged) {
			c.tagged[len(c.tagged)-1-i].Tag = tag
		}
	}
	c.to.tagged, c.to.held, c.to.there, c.state = c.tagged, c.held, true, 1
	if c.to.flaw == "blank" && len(c.tagged)+len(c.held) == 0 {
		c.to.there = false
	}
	return nil
}

func (c *crate) Close() error {
	if c.to.flaw == "litters" {
		c.to.left = "crumbs"
	}
	if c.to.flaw == "commits" && c.state == 0 {
		return c.Commit(context.Background())
	}
	return nil
}

func shelfCase(flaw string) SinkCase {
	s := &shelf{}
	return SinkCase{
		Open:     opener(""),
		Create:   func() (filter.Sink, error) { *s = shelf{flaw: flaw}; return &crate{to: s}, nil },
		Read:     func() ([]Tagged, []Tagged, bool, error) { return s.tagged, s.held, s.there, nil },
		Leftover: func() string { return s.left },
	}
}

func TestASoundSinkPasses(t *testing.T) { Sink(t, shelfCase("")) }

func TestEachFlawOfASinkIsFound(t *testing.T) {
	for flaw, where := range map[string]string{
		"loses": "in one output", "mixes": "held back", "keeps": "with its tag", "blank": "without records", "eager": "before the commit",
		"commits": "leaves nothing", "litters": "leaves nothing", "deaf": "context", "late": "after the commit",
	} {
		found(t, flaw, where, CheckSink(shelfCase(flaw)))
	}
}
