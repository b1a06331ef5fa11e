package filtertest

import (
	"context"
	"errors"
	"fmt"
	"io"
	"math"
	"testing"

	"labelweir/filter"
	"labelweir/model"
)

// Tagged is one record as it stands in an output.
type Tagged struct {
	Row int64 // its number in the input
	Tag filter.Tag
}

// SinkCase is a sink under test with what is needed to see what it does.
type SinkCase struct {
	Open func() (filter.Source, error) // opens the input; it has at least two batches

	// Create makes a sink for the input with a quarantine, writing to a new place each time.
	Create func() (filter.Sink, error)

	// Read gives what stands in the outputs of the sink made last; there is false when neither of them does.
	Read func() (tagged, quarantine []Tagged, there bool, err error)

	// Leftover tells what the sink made last left behind beside its outputs; "" for nothing.
	Leftover func() string

	Tolerance float64 // of scores and margins, for formats that round them
}

// Sink runs the behaviours of a filter.Sink as subtests.
func Sink(t *testing.T, c SinkCase) {
	t.Helper()
	for _, b := range sinkBehaviours() {
		t.Run(b.name, func(t *testing.T) {
			if err := b.check(c); err != nil {
				t.Error(err)
			}
		})
	}
}

// CheckSink gives one error for each behaviour that a sink lacks.
func CheckSink(c SinkCase) (faults []error) {
	for _, b := range sinkBehaviours() {
		if err := b.check(c); err != nil {
			faults = append(faults, fmt.Errorf("%s: %w", b.name, err))
		}
	}
	return faults
}

type sinkBehaviour struct {
	name  string
	check func(SinkCase) error
}

func sinkBehaviours() []sinkBehaviour {
	return []sinkBehaviour{
		{"each record is in one output, in order, with its tag", func(c SinkCase) error { return c.complete(mixed) }},
		{"all records may be held back", func(c SinkCase) error { return c.complete(all) }},
		{"no record may be held back", func(c SinkCase) error { return c.complete(none) }},
		{"an input without records gives outputs without records", SinkCase.empty},
		{"nothing shows before the commit", SinkCase.hidden},
		{"close without commit leaves nothing", SinkCase.dropped},
		{"nothing is delivered or committed once the context has ended", SinkCase.cancelled},
		{"nothing is delivered after the commit", SinkCase.over},
	}
}

// tag is what the checks deliver with a row: every kind of verdict and reason comes up.
func tag(row int64, divert bool) filter.Tag {
	t := filter.Tag{Score: float64(row%101) / 100, Margin: 2.5 - float64(row%7), Implied: fmt.Sprintf("class %d", row%4),
		Snapshot: fmt.Sprintf("%012x", 1+row/100), Verdict: filter.Verdict(row % 3), Divert: divert}
	if row%5 == 1 {
		t = filter.Tag{Score: math.NaN(), Margin: math.NaN(), Verdict: filter.Unscored, Divert: divert,
			Reason: model.NoLabel + model.Reason(row/5%int64(model.InputsChanged))}
	}
	return t
}

func mixed(row int64) bool { return row%9 == 4 || row%13 < 2 }
func all(int64) bool       { return true }
func none(int64) bool      { return false }

// deliver sends the whole input, and spoils what it handed over after each call, for a sink keeps neither.
func (c SinkCase) deliver(sink filter.Sink, divert func(int64) bool) (want [2][]Tagged, err error) {
	err = readAll(c.Open, func(b *filter.Batch) error {
		tags := make([]filter.Tag, b.Rows())
		for i := range tags {
			row := b.First + int64(i)
			tags[i] = tag(row, divert(row))
			k := 0
			if tags[i].Divert {
				k = 1
			}
			want[k] = append(want[k], Tagged{row, tags[i]})
		}
		err := sink.Deliver(context.Background(), b, tags)
		for i := range tags {
			tags[i] = filter.Tag{Implied: "spoilt", Divert: true}
		}
		return err
	})
	return want, err
}

func (c SinkCase) complete(divert func(int64) bool) error {
	sink, err := c.Create()
	if err != nil {
		return err
	}
	want, err := c.deliver(sink, divert)
	if err == nil {
		err = sink.Commit(context.Background())
	}
	if err = errors.Join(err, sink.Close()); err != nil {
		return err
	}
	return c.compare(want)
}

// compare tells whether the outputs hold what was delivered.
func (c SinkCase) compare(want [2][]Tagged) error {
	tagged, held, there, err := c.Read()
	if err != nil || !there {
		return errors.Join(fmt.Errorf("outputs there: %v", there), err)
	}
	for k, got := range [][]Tagged{tagged, held} {
		name := [...]string{"tagged", "quarantine"}[k]
		if len(got) != len(want[k]) {
			return fmt.Errorf("%s has %d records, want %d", name, len(got), len(want[k]))
		}
		for i, g := range got {
			if w := want[k][i]; g.Row != w.Row || !c.same(g.Tag, w.Tag) {
				return fmt.Errorf("%s, record %d: got row %d with %+v, want row %d with %+v", name, i, g.Row, g.Tag, w.Row, w.Tag)
			}
		}
	}
	if left := c.Leftover(); left != "" {
		return fmt.Errorf("left behind: %s", left)
	}
	return nil
}

// same compares tags as they can be read back: Divert only shows in the output chosen.
func (c SinkCase) same(a, b filter.Tag) bool {
	near := func(x, y float64) bool { return math.Abs(x-y) <= c.Tolerance || (math.IsNaN(x) && math.IsNaN(y)) }
	return near(a.Score, b.Score) && near(a.Margin, b.Margin) && a.Implied == b.Implied && a.Snapshot == b.Snapshot &&
		a.Verdict == b.Verdict && a.Reason == b.Reason
}

func (c SinkCase) empty() error {
	sink, err := c.Create()
	if err != nil {
		return err
	}
	if err := errors.Join(sink.Commit(context.Background()), sink.Close()); err != nil {
		return err
	}
	return c.compare([2][]Tagged{})
}

func (c SinkCase) hidden() error {
	sink, err := c.Create()
	if err != nil {
		return err
	}
	if _, err := c.deliver(sink, mixed); err != nil {
		return errors.Join(err, sink.Close())
	}
	_, _, there, _ := c.Read()
	if err := errors.Join(sink.Commit(context.Background()), sink.Close()); err != nil {
		return err
	}
	if there {
		return errors.New("an output showed too early")
	}
	return nil
}

func (c SinkCase) gone() error {
	if _, _, there, _ := c.Read(); there {
		return errors.New("an output shows")
	}
	if left := c.Leftover(); left != "" {
		return fmt.Errorf("left behind: %s", left)
	}
	return nil
}

func (c SinkCase) dropped() error {
	sink, err := c.Create()
	if err != nil {
		return err
	}
	_, err = c.deliver(sink, mixed)
	if err = errors.Join(err, sink.Close()); err != nil {
		return err
	}
	return c.gone()
}

// first gives the first batch of the input; the source is closed.
func (c SinkCase) first() (*filter.Batch, []filter.Tag, error) {
	src, err := c.Open()
	if err != nil {
		return nil, nil, err
	}
	b, err := src.Next(context.Background())
	if err != nil {
		if err == io.EOF {
			err = errors.New("the input is empty")
		}
		return nil, nil, errors.Join(err, src.Close())
	}
	return b, make([]filter.Tag, b.Rows()), src.Close()
}

func (c SinkCase) cancelled() error {
	sink, err := c.Create()
	if err != nil {
		return err
	}
	b, tags, err := c.first()
	if err != nil {
		return errors.Join(err, sink.Close())
	}
	defer b.Release()
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	delivered, committed := sink.Deliver(ctx, b, tags), sink.Commit(ctx)
	if err := sink.Close(); err != nil {
		return err
	}
	if delivered == nil || committed == nil {
		return fmt.Errorf("deliver gave %v, commit %v", delivered, committed)
	}
	return c.gone()
}

func (c SinkCase) over() error {
	sink, err := c.Create()
	if err != nil {
		return err
	}
	b, tags, err := c.first()
	if err != nil {
		return errors.Join(err, sink.Close())
	}
	defer b.Release()
	if err := sink.Commit(context.Background()); err != nil {
		return errors.Join(err, sink.Close())
	}
	err = sink.Deliver(context.Background(), b, tags)
	if e := sink.Close(); e != nil {
		return e
	}
	if err == nil {
		return errors.New("a batch was accepted")
	}
	return nil
}
