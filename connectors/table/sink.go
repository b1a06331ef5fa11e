package table

import (
	"context"
	"errors"
	"fmt"
	"path/filepath"
	"slices"

	"github.com/apache/arrow/go/v16/arrow"

	"labelweir/connectors/disk"
	"labelweir/filter"
)

// Sink writes tagged records to one or two files. It implements filter.Sink and belongs to one goroutine.
//
// Columns, dictionaries, nulls and metadata stay as they are as far as the output's format has them; the tag columns
// follow. Record batches are cut anew, see Options.BlockRows.
type Sink struct {
	disk   disk.FS
	schema *arrow.Schema // of the input
	tagged *output
	held   *output // nil without a quarantine
	next   int64   // number of the record that must come next
	err    error   // sticky
	state  sinkState

	finished bool // everything is on the disk

	toTagged, toHeld []run // scratch
}

type sinkState uint8

const (
	sinkOpen sinkState = iota
	sinkDone
	sinkClosed
)

// Create starts writing out what was read from src, or from another Source of the same files; src may be closed before
// the sink. Nothing stands under the final names before Commit. Errors wrap ErrTarget, or ErrColumn when the input has tag columns already.
func Create(out OutputPaths, src *Source, opt Options) (*Sink, error) {
	if len(opt.Formats) == 0 {
		opt.Formats = src.opt.Formats
	}
	opt = opt.filled()
	d, schema := opt.Disk, src.in.schema
	for _, f := range schema.Fields() {
		if IsTag(f.Name) {
			return nil, &Error{Path: src.in.title(), Column: f.Name, What: "is already there, from an earlier run",
				Do: "drop the weir_ columns of the input first", Kind: ErrColumn}
		}
		if !canGather(f.Type) {
			return nil, &Error{Path: src.in.title(), Column: f.Name, What: fmt.Sprintf("rows of type %s can't be copied", f.Type),
				Do: "unions and run-end-encoded values inside of lists and structs are not supported: drop or flatten the column", Kind: ErrColumn}
		}
	}
	if out.Tagged == "" {
		return nil, &Error{Path: src.in.title(), What: "no output is named for it", Do: "name a file for the tagged records", Kind: ErrTarget}
	}
	if err := distinct(d, src.in.files, out); err != nil {
		return nil, err
	}
	s := &Sink{disk: d, schema: schema}
	for _, o := range []struct {
		path string
		to   **output
	}{{out.Tagged, &s.tagged}, {out.Quarantine, &s.held}} {
		if o.path == "" {
			continue
		}
		t, err := openTarget(d, o.path, opt)
		if err == nil {
			*o.to, err = newOutput(t, src, opt)
		}
		if err != nil {
			return nil, errors.Join(err, s.Close())
		}
	}
	return s, nil
}

// Rows tells how many records went to each file so far.
func (s *Sink) Rows() (tagged, quarantine int64) {
	if s.tagged != nil {
		tagged = s.tagged.written + s.tagged.rows
	}
	if s.held != nil {
		quarantine = s.held.written + s.held.rows
	}
	return tagged, quarantine
}

// Deliver implements filter.Sink. The batches must come from the source in order and without gaps.
func (s *Sink) Deliver(ctx context.Context, b *filter.Batch, tags []filter.Tag) error {
	if err := s.usable(ctx); err != nil {
		return err
	}
	rec, ok := b.Payload.(arrow.Record)
	switch {
	case !ok:
		panic("table: batch of another source")
	case len(tags) != b.Rows() || rec.NumRows() != int64(len(tags)):
		panic(fmt.Sprintf("table: %d tags for %d rows", len(tags), b.Rows()))
	case b.First != s.next:
		panic(fmt.Sprintf("table: batch from row %d where row %d comes next", b.First, s.next))
	case rec.Schema() != s.schema && !rec.Schema().Equal(s.schema):
		panic("table: batch of another schema")
	}
	s.split(tags)
	if len(s.toHeld) > 0 && s.held == nil {
		s.err = &Error{Path: s.tagged.target.path, Row: b.First + s.toHeld[0].lo + 1,
			What: "the record is to be held back, but there is no quarantine output", Do: "name one", Kind: ErrTarget}
		return s.err
	}
	s.err = s.write(s.tagged, rec, s.toTagged, tags)
	if s.err == nil && s.held != nil {
		s.err = s.write(s.held, rec, s.toHeld, tags)
	}
	s.next += rec.NumRows()
	return s.err
}

// usable tells whether another call is allowed.
func (s *Sink) usable(ctx context.Context) error {
	if s.state != sinkOpen {
		return &Error{Path: s.path(), What: "written after Commit or Close", Kind: ErrClosed}
	}
	if s.err != nil {
		return s.err
	}
	return ctx.Err()
}

// split sets toTagged and toHeld to the runs of rows of each kind.
func (s *Sink) split(tags []filter.Tag) {
	s.toTagged, s.toHeld = s.toTagged[:0], s.toHeld[:0]
	for lo := 0; lo < len(tags); {
		hi := lo + 1
		for hi < len(tags) && tags[hi].Divert == tags[lo].Divert {
			hi++
		}
		r := run{int64(lo), int64(hi)}
		if tags[lo].Divert {
			s.toHeld = append(s.toHeld, r)
		} else {
			s.toTagged = append(s.toTagged, r)
		}
		lo = hi
	}
}

// write adds runs to an output.
func (s *Sink) write(o *output, rec arrow.Record, runs []run, tags []filter.Tag) error {
	return fenced(o, func() error { return o.add(rec, runs, tags) })
}

// fenced makes arrow's panics errors, and names the target in all of them.
func fenced(o *output, do func() error) (err error) {
	defer func() {
		if p := recover(); p != nil {
			err = Caught(p)
		}
		if err != nil {
			err = o.target.fault("can't be written", ErrWrite, err)
		}
	}()
	return do()
}

// Finish writes what is left and brings it to the disk, under no final name yet. No Deliver may follow.
func (s *Sink) Finish(ctx context.Context) error {
	if err := s.usable(ctx); err != nil || s.finished {
		return err
	}
	for _, o := range s.outputs() {
		if s.err = fenced(o, o.finish); s.err != nil {
			return s.err
		}
	}
	s.finished = true
	return nil
}

// Commit implements filter.Sink. When it fails, the final names are as they were, except that a file replaced on
// request stays replaced.
func (s *Sink) Commit(ctx context.Context) error { return s.CommitWith(ctx) }

// CommitWith commits together with other targets, which are filled and get their names first. When it fails, neither
// these, once they are dropped, nor what the sink wrote stands under a name that it did not replace.
func (s *Sink) CommitWith(ctx context.Context, others ...*Target) error {
	if err := s.Finish(ctx); err != nil {
		return err
	}
	var all []*Target
	for _, t := range others {
		if t != nil {
			all = append(all, t)
		}
	}
	for _, o := range slices.Backward(s.outputs()) { // tagged records must not seem complete without the quarantine
		all = append(all, o.target)
	}
	if s.err = s.place(all); s.err != nil {
		return s.err
	}
	s.state = sinkDone
	return nil
}

// place gives the files their names, once all names can be had.
func (s *Sink) place(all []*Target) error {
	for _, t := range all {
		if t.pipe {
			continue
		}
		if err := t.free(); err != nil {
			return err
		}
	}
	for _, t := range all {
		if err := t.place(); err != nil {
			return err
		}
	}
	for _, t := range all {
		if t.pipe {
			continue
		}
		if err := s.disk.SyncDir(filepath.Dir(t.path)); err != nil {
			return t.fault("its folder can't be brought to the disk", ErrWrite, err)
		}
	}
	for _, t := range all {
		t.kept = true
	}
	return nil
}

// Close implements filter.Sink. Calls after the first do nothing.
func (s *Sink) Close() error {
	if s.state == sinkClosed {
		return nil
	}
	var errs []error
	for _, o := range s.outputs() {
		if s.state != sinkDone {
			errs = append(errs, o.target.Drop())
		}
		o.release()
	}
	s.state = sinkClosed
	return errors.Join(errs...)
}

func (s *Sink) outputs() []*output {
	var outs []*output
	for _, o := range []*output{s.tagged, s.held} {
		if o != nil {
			outs = append(outs, o)
		}
	}
	return outs
}

func (s *Sink) path() string {
	if s.tagged == nil {
		return ""
	}
	return s.tagged.target.path
}

var _ filter.Sink = (*Sink)(nil)
