package table

import (
	"context"
	"errors"
	"fmt"
	"slices"
	"sync/atomic"

	"github.com/apache/arrow/go/v16/arrow"

	"labelweir/filter"
	"labelweir/model"
)

// Source reads the files of an input, one after the other. It implements filter.Source and belongs to one goroutine.
type Source struct {
	in     *input
	opt    Options
	rec    filter.Record
	plan   plan
	names  []string
	choice []Choice

	labels, sources *coder
	levels          []*coder // one a feature, nil unless Category

	trays  trays
	cur    arrow.Record // record batch being cut
	at     int64        // rows of it handed out
	row    int64        // rows handed out in all
	err    error        // sticky
	closed bool
}

// Open opens files of the same columns as one input. The record's label must name a column; its fields are inferred from
// the first rows when it has none. Errors wrap ErrUnreadable or ErrColumn.
func Open(files []Input, rec filter.Record, opt Options) (src *Source, err error) {
	opt = opt.filled()
	in, err := openInput(files, texts(rec), nil, opt)
	if err != nil {
		return nil, err
	}
	defer func() {
		if err != nil {
			in.close()
		}
	}()
	names := uniqueNames(in.schema)
	p := &planner{in: in, path: in.title(), schema: in.schema, names: names}
	pl, err := p.parts(rec)
	if err != nil {
		return nil, err
	}
	choice, err := choose(p, rec, pl, opt)
	if err != nil {
		return nil, err
	}
	if len(rec.Fields) == 0 {
		rec = explicit(rec, choice, in.schema)
	}
	if err := p.features(rec, &pl); err != nil {
		return nil, err
	}
	if len(pl.features) == 0 {
		return nil, &Error{Path: p.path, What: fmt.Sprintf("none of its %d columns can be a field", len(visible(p.schema))),
			Do: "name the fields, or add columns of numbers, text or vectors", Kind: ErrColumn}
	}
	src = &Source{in: in, opt: opt, rec: rec, plan: pl, names: names, choice: choice,
		labels: newCoder(), sources: newCoder(), levels: make([]*coder, len(pl.features))}
	src.rec.Fields = nil
	for i, f := range pl.features {
		if f.Kind == model.Category {
			src.levels[i] = newCoder()
		}
		src.rec.Fields = append(src.rec.Fields, f.Field)
	}
	return src, nil
}

// texts names the columns whose values are read as names whatever the fields are.
func texts(rec filter.Record) []string {
	var names []string
	for _, name := range []string{rec.Label, rec.Source} {
		if name != "" {
			names = append(names, name)
		}
	}
	for _, f := range rec.Fields {
		if f.Kind == model.Category {
			names = append(names, f.Path)
		}
	}
	return names
}

// choose infers the fields, or says for each column whether the record names it.
func choose(p *planner, rec filter.Record, pl plan, opt Options) ([]Choice, error) {
	parts := map[int]string{}
	for _, x := range []struct {
		index int
		name  string
	}{{pl.time, "the time"}, {pl.source, "the source"}, {pl.label, "the label"}} {
		if x.index >= 0 {
			parts[x.index] = x.name
		}
	}
	if len(rec.Fields) == 0 {
		habits, err := peek(p.in, opt)
		if err != nil {
			return nil, err
		}
		return infer(p.names, p.schema, parts, habits), nil
	}
	if err := p.features(rec, &pl); err != nil {
		return nil, err
	}
	out := make([]Choice, len(p.names))
	for i, f := range p.schema.Fields() {
		out[i] = Choice{Column: p.names[i], Type: f.Type.String(), Why: "not among the fields"}
		if part, ok := parts[i]; ok {
			out[i].Why = part
		}
	}
	for _, f := range pl.features {
		out[f.index].Used, out[f.index].Kind, out[f.index].Why = true, f.Kind, "named"
	}
	return out, nil
}

// Choice tells, column by column, what is used as what and why.
func (s *Source) Choice() []Choice {
	out := slices.Clone(s.choice)
	if raw := RawIndex(s.in.schema); raw >= 0 {
		out = slices.Delete(out, raw, raw+1)
	}
	return out
}

// Record is the record as read, with its fields written out: opening the same or a like file with it reads the same
// columns.
func (s *Source) Record() filter.Record {
	rec := s.rec
	rec.Fields = append([]filter.Field(nil), rec.Fields...)
	return rec
}

// Format is the name of the format of the file being read.
func (s *Source) Format() string { return s.in.format.Name }

// Progress tells how many bytes of how many have been read.
func (s *Source) Progress() (done, size int64) { return s.in.progress() }

// Next implements filter.Source.
func (s *Source) Next(ctx context.Context) (*filter.Batch, error) {
	if s.closed {
		return nil, &Error{Path: s.in.title(), What: "read after Close", Kind: ErrClosed}
	}
	if err := ctx.Err(); err != nil {
		return nil, err
	}
	if s.err != nil {
		return nil, s.err
	}
	b, err := s.next()
	if err != nil {
		s.err = err
		s.drop()
		return nil, err
	}
	return b, nil
}

func (s *Source) next() (*filter.Batch, error) {
	for s.cur == nil {
		rec, err := s.in.next()
		if err != nil {
			return nil, err // io.EOF too
		}
		if s.cur, s.at = rec, 0; rec.NumRows() == 0 {
			s.drop()
		}
	}
	part := s.cur.NewSlice(s.at, min(s.at+int64(s.opt.Rows), s.cur.NumRows()))
	b, err := s.batch(part)
	if err != nil {
		part.Release()
		return nil, err
	}
	s.row += part.NumRows()
	if s.at += part.NumRows(); s.at == s.cur.NumRows() {
		s.drop() // a source may rest here for long
	}
	return b, nil
}

// batch reads the table out of a slice of a record batch and passes the slice on as its payload.
func (s *Source) batch(part arrow.Record) (b *filter.Batch, err error) {
	defer func() {
		if p := recover(); p != nil {
			b, err = nil, s.in.damaged("its values can't be read", Caught(p))
		}
	}()
	own := s.trays.get(len(s.plan.features))
	if err := s.fill(own, part); err != nil {
		return nil, err
	}
	table := own.table // the batch's own, for the tray may serve another one while somebody looks at this
	table.Columns = slices.Clone(table.Columns)
	b = &filter.Batch{First: s.row, Table: &table, Payload: part}
	if s.plan.time >= 0 {
		b.Times = own.times
	}
	var given atomic.Bool
	b.Release = func() {
		if given.CompareAndSwap(false, true) {
			part.Release()
			s.trays.put(own)
		}
	}
	return b, nil
}

// fill reads the columns in use out of a slice of a record batch.
func (s *Source) fill(own *tray, part arrow.Record) (err error) {
	n, t := int(part.NumRows()), &own.table
	t.Keys = emptied(t.Keys, n)
	for i := range n {
		t.Keys = append(t.Keys, model.Key(s.row+int64(i)))
	}
	s.mark(s.plan.label)
	if t.Labels, err = s.codes(s.labels, t.Labels, part, s.plan.label); err != nil {
		return err
	}
	t.Classes = s.labels.list()
	if s.plan.source >= 0 {
		if t.Sources, err = s.codes(s.sources, t.Sources, part, s.plan.source); err != nil {
			return err
		}
		t.SourceNames = s.sources.list()
	}
	for i := range s.plan.features {
		s.mark(s.plan.features[i].index)
		if err = s.column(i, &t.Columns[i], part); err != nil {
			return err
		}
	}
	if s.plan.time >= 0 {
		if own.times, err = appendTimes(emptied(own.times, n), part.Column(s.plan.time)); err != nil {
			return s.valueError(s.plan.time, 0, err)
		}
	}
	return nil
}

// mark tells which column is read now.
func (s *Source) mark(index int) {
	if s.opt.Mark != nil {
		s.opt.Mark(s.in.place(), s.names[index])
	}
}

// column reads one feature.
func (s *Source) column(i int, col *model.Column, part arrow.Record) (err error) {
	f := s.plan.features[i]
	col.Name, col.Kind, col.Size = f.Path, f.Kind, f.Size
	switch arr := part.Column(f.index); f.Kind {
	case model.Number:
		col.Values, err = appendNumbers(emptied(col.Values, arr.Len()), arr)
	case model.Vector:
		col.Values, err = appendVectors(emptied(col.Values, arr.Len()*f.Size), arr)
	case model.Category:
		col.Codes, err = s.codes(s.levels[i], col.Codes, part, f.index)
		col.Levels = s.levels[i].list()
		return err
	}
	if err != nil {
		return s.valueError(f.index, 0, err)
	}
	return nil
}

// codes reads a column of names into the memory of dst.
func (s *Source) codes(c *coder, dst []int32, part arrow.Record, index int) ([]int32, error) {
	codes, bad, err := c.append(emptied(dst, int(part.NumRows())), part.Column(index))
	if err != nil {
		return nil, s.valueError(index, bad, err)
	}
	return codes, nil
}

// valueError says that the value in row i of the current slice means nothing as what the column is used for.
func (s *Source) valueError(index, i int, err error) error {
	e := At(s.in.place(), ErrUnreadable, "", "", nil)
	e.Row, e.Column = s.row-s.in.before+int64(i)+1, s.names[index]
	if f := fractional(0); errors.As(err, &f) {
		e.What, e.Do = f.Error(), "convert the column to text, integers or a dictionary, or cut it into ranges"
		return e
	}
	if errors.Is(err, errNotText) {
		e.What, e.Do = err.Error(), "convert the column to text first"
		return e
	}
	e.What, e.Err = "the value can't be read", err
	return e
}

// drop gives the current record batch back.
func (s *Source) drop() {
	if s.cur != nil {
		s.cur.Release()
		s.cur = nil
	}
}

// Close implements filter.Source. Calls after the first do nothing.
func (s *Source) Close() error {
	if s.closed {
		return nil
	}
	s.closed = true
	s.drop()
	s.trays.drop()
	return s.in.close()
}

var _ filter.Source = (*Source)(nil)
