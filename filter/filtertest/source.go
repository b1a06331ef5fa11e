package filtertest

import (
	"context"
	"errors"
	"fmt"
	"io"
	"slices"
	"testing"

	"labelweir/filter"
	"labelweir/model"
)

// Source runs the behaviours of a filter.Source as subtests. open starts a new reading of the same input each time; the
// input must have at least two batches, for most of what can go wrong goes wrong between batches.
func Source(t *testing.T, open func() (filter.Source, error)) {
	t.Helper()
	for _, b := range sourceBehaviours() {
		t.Run(b.name, func(t *testing.T) {
			if err := b.check(open); err != nil {
				t.Error(err)
			}
		})
	}
}

// CheckSource gives one error for each behaviour that a source lacks.
func CheckSource(open func() (filter.Source, error)) (faults []error) {
	for _, b := range sourceBehaviours() {
		if err := b.check(open); err != nil {
			faults = append(faults, fmt.Errorf("%s: %w", b.name, err))
		}
	}
	return faults
}

type sourceBehaviour struct {
	name  string
	check func(open func() (filter.Source, error)) error
}

func sourceBehaviours() []sourceBehaviour {
	return []sourceBehaviour{
		{"rows are numbered without gaps and keyed by their number", numbered},
		{"tables are consistent and keep their columns", consistent},
		{"lists only grow at their end", growing},
		{"two readings give the same rows", repeatable},
		{"batches do not share memory", independent},
		{"batches stay valid when the source is closed", lasting},
		{"the end stays the end", ended},
		{"nothing is read once the context has ended", cancelled},
	}
}

// readAll calls see for each batch, releases it afterwards, and closes the source.
func readAll(open func() (filter.Source, error), see func(*filter.Batch) error) (err error) {
	src, err := open()
	if err != nil {
		return err
	}
	defer func() { err = errors.Join(err, src.Close()) }()
	batches := 0
	for {
		b, err := src.Next(context.Background())
		if err == io.EOF {
			if batches < 2 {
				return fmt.Errorf("the input has %d batches, the checks need two", batches)
			}
			return nil
		}
		if err != nil {
			return err
		}
		batches++
		err = see(b)
		b.Release()
		if err != nil {
			return err
		}
	}
}

func numbered(open func() (filter.Source, error)) error {
	row := int64(0)
	return readAll(open, func(b *filter.Batch) error {
		if b.First != row {
			return fmt.Errorf("batch begins at row %d, want %d", b.First, row)
		}
		for i, k := range b.Table.Keys {
			if want := model.Key(row + int64(i)); k != want {
				return fmt.Errorf("row %d has key %x, want %x", row+int64(i), k, want)
			}
		}
		row += int64(b.Rows())
		return nil
	})
}

func consistent(open func() (filter.Source, error)) error {
	var before []model.Column
	return readAll(open, func(b *filter.Batch) error {
		if err := CheckBatch(b); err != nil {
			return err
		}
		now := make([]model.Column, len(b.Table.Columns))
		for i, c := range b.Table.Columns {
			now[i] = model.Column{Name: c.Name, Kind: c.Kind, Size: c.Size}
		}
		if before != nil && fmt.Sprint(now) != fmt.Sprint(before) {
			return fmt.Errorf("columns went from %v to %v", before, now)
		}
		before = now
		return nil
	})
}

// CheckBatch tells whether every slice of a batch has one entry a row and every code stands for a name.
func CheckBatch(b *filter.Batch) error {
	t, n := b.Table, b.Rows()
	if b.Release == nil {
		return errors.New("a batch without Release")
	}
	if len(t.Keys) != n || (b.Times != nil && len(b.Times) != n) {
		return fmt.Errorf("%d keys and %d times for %d rows", len(t.Keys), len(b.Times), n)
	}
	if err := codes("label", t.Labels, n, t.Classes); err != nil {
		return err
	}
	if t.Sources != nil {
		if err := codes("source", t.Sources, n, t.SourceNames); err != nil {
			return err
		}
	}
	met := map[string]bool{}
	for _, c := range t.Columns {
		if met[c.Name] {
			return fmt.Errorf("two columns are named %q", c.Name)
		}
		met[c.Name] = true
		switch c.Kind {
		case model.Category:
			if err := codes(c.Name, c.Codes, n, c.Levels); err != nil {
				return err
			}
		case model.Number, model.Vector:
			if c.Size < 1 || (c.Kind == model.Number && c.Size != 1) || len(c.Values) != n*c.Size {
				return fmt.Errorf("column %q: %d values for %d rows of %d", c.Name, len(c.Values), n, c.Size)
			}
		default:
			return fmt.Errorf("column %q has %v", c.Name, c.Kind)
		}
	}
	return nil
}

func codes(what string, list []int32, n int, names []string) error {
	if len(list) != n {
		return fmt.Errorf("%s: %d codes for %d rows", what, len(list), n)
	}
	for i, c := range list {
		if c < -1 || int(c) >= len(names) {
			return fmt.Errorf("%s: code %d in row %d, there are %d names", what, c, i, len(names))
		}
	}
	for i, s := range names {
		if slices.Contains(names[:i], s) {
			return fmt.Errorf("%s: the name %q has two codes", what, s)
		}
	}
	return nil
}

// lists are the name lists of a table: classes, sources, levels.
func lists(t *model.Table) [][]string {
	out := [][]string{t.Classes, t.SourceNames}
	for _, c := range t.Columns {
		out = append(out, c.Levels)
	}
	return out
}

func growing(open func() (filter.Source, error)) error {
	var handed, copies [][]string // of the batch before, as handed out and as they were then
	return readAll(open, func(b *filter.Batch) error {
		for i, now := range lists(b.Table) {
			if handed == nil {
				break
			}
			if !slices.Equal(handed[i], copies[i]) {
				return fmt.Errorf("list %d changed after it was handed out, from %q to %q", i, copies[i], handed[i])
			}
			if len(now) < len(copies[i]) || !slices.Equal(now[:len(copies[i])], copies[i]) {
				return fmt.Errorf("list %d went from %q to %q", i, copies[i], now)
			}
		}
		handed, copies = lists(b.Table), nil
		for _, l := range handed {
			copies = append(copies, slices.Clone(l))
		}
		return nil
	})
}

// content is a batch's rows in a form that can be compared.
func content(b *filter.Batch) string {
	t := b.Table
	s := fmt.Sprint(b.First, t.Labels, t.Sources, t.Keys, t.Classes, t.SourceNames, b.Times)
	for _, c := range t.Columns {
		s += fmt.Sprint(c)
	}
	return s
}

func contents(open func() (filter.Source, error)) (all []string, err error) {
	err = readAll(open, func(b *filter.Batch) error {
		all = append(all, content(b))
		return nil
	})
	return all, err
}

func repeatable(open func() (filter.Source, error)) error {
	first, err := contents(open)
	if err != nil {
		return err
	}
	second, err := contents(open)
	if err != nil {
		return err
	}
	if !slices.Equal(first, second) {
		return errors.New("the second reading differs from the first")
	}
	return nil
}

func independent(open func() (filter.Source, error)) error {
	var kept []*filter.Batch
	var then []string
	err := readAll(open, func(b *filter.Batch) error {
		then = append(then, content(b))
		copied := *b
		b.Release = func() {} // not yet
		kept = append(kept, &copied)
		return nil
	})
	for i, b := range kept {
		if err == nil && content(b) != then[i] {
			err = fmt.Errorf("batch %d changed while later ones were read", i)
		}
	}
	done := make(chan struct{}) // the owner need not be the goroutine that reads
	go func() {
		defer close(done)
		for _, b := range kept {
			b.Release()
		}
	}()
	<-done
	return err
}

func lasting(open func() (filter.Source, error)) error {
	src, err := open()
	if err != nil {
		return err
	}
	b, err := src.Next(context.Background())
	if err != nil {
		return errors.Join(err, src.Close())
	}
	defer b.Release()
	then := content(b)
	if err := src.Close(); err != nil {
		return err
	}
	if content(b) != then {
		return errors.New("the batch changed")
	}
	return nil
}

func ended(open func() (filter.Source, error)) (err error) {
	src, err := open()
	if err != nil {
		return err
	}
	defer func() { err = errors.Join(err, src.Close()) }()
	for ends := 0; ends < 3; {
		b, err := src.Next(context.Background())
		switch {
		case err == io.EOF:
			ends++
		case err != nil:
			return fmt.Errorf("%w after %d ends", err, ends)
		default:
			b.Release()
			if ends > 0 {
				return errors.New("a batch comes after the end")
			}
		}
	}
	return nil
}

func cancelled(open func() (filter.Source, error)) (err error) {
	src, err := open()
	if err != nil {
		return err
	}
	defer func() { err = errors.Join(err, src.Close()) }()
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	b, err := src.Next(ctx)
	if err == nil {
		b.Release()
		return errors.New("a batch was read")
	}
	if !errors.Is(err, context.Canceled) {
		return fmt.Errorf("got %w, want the context's error", err)
	}
	return nil
}
