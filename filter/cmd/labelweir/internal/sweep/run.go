package sweep

import (
	"cmp"
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"time"

	"labelweir/connectors/disk"
	"labelweir/connectors/table"
	"labelweir/filter"
	"labelweir/filter/cmd/labelweir/internal/guard"
	"labelweir/filter/config"
)

// Watch is who wants to hear of a sweep while it runs. Each part may be nil.
type Watch struct {
	Chosen   func([]table.Choice)                  // once, when the columns are known and the outputs can be created
	Progress func(phase string, done, total int64) // from one goroutine at a time
	Tell     func(sentence string)                 // what a person should know of a journal
	Program  string                                // which build this is; a journal is for the same one
	Marks    *guard.Marks                          // where the sweep is, for who outlives it
	Disk     disk.FS                               // where outputs go; nil: the machine's disk
	In       io.Reader                             // standard input
	Out      io.Writer                             // standard output
	Learner  filter.Learner                        // nil: the real model
	Now      func() time.Time                      // clock of the report's times; nil: time.Now
}

// Run sweeps the file of c, which [config.Loader.Sweep] has passed, and writes all files that c names. They get their
// names when all of them are whole and on the disk: snapshot, report, quarantine, and the tagged file last. When the
// error is not nil, none stands there that was not there before.
func Run(ctx context.Context, c *config.Config, w Watch) (*filter.Report, error) {
	files, closeInputs, err := inputs(c, w.In)
	if err != nil {
		return nil, err
	}
	defer closeInputs()
	options := optionsOf(c, w)
	unread, err := openUnreadable(c.Output.Unreadable, options)
	if err != nil {
		return nil, err
	}
	defer unread.drop()
	options.Unreadable = unread.taker(false)
	stamps := takeStamps(files)
	w.Marks.Enter(c.Input.Title())
	first, err := open(ctx, files, c.Record, options)
	w.Marks.Leave()
	if err != nil {
		return nil, err
	}
	defer first.Close()
	record, choice := first.Record(), first.Choice()
	snapshotFile, err := table.NewTarget(c.Output.Snapshot, options)
	if err != nil {
		return nil, err
	}
	defer snapshotFile.Drop()
	reportFile, err := table.NewTarget(c.Output.Report, options)
	if err != nil {
		return nil, err
	}
	defer reportFile.Drop()

	sink, err := table.Create(
		table.OutputPaths{Tagged: c.Output.Tagged, Quarantine: c.Output.Quarantine}, first, options)
	if err != nil {
		return nil, err
	}
	defer sink.Close()
	if err := first.Close(); err != nil { // its record batch is not to stay in memory while the model learns
		return nil, err
	}
	if w.Chosen != nil {
		w.Chosen(choice)
	}
	journal, err := openJournal(c, files, w)
	if err != nil {
		return nil, err
	}
	defer journal.close()
	var last filter.Snapshot
	readings := 0
	s := filter.Sweep{
		Config: c.Filter,
		Open: func(context.Context) (filter.Source, error) {
			options.Unreadable = unread.taker(readings == 0)
			readings++
			source, err := openMarked(w.Marks, c.Input.Title(), func() (filter.Source, error) { return table.Open(files, record, options) })
			return stamps.watch(source, err)
		},
		Sink: unplaced{sink},
		Progress: func(phase string, done, total int64) {
			w.Marks.Phase(phase)
			if w.Progress != nil {
				w.Progress(phase, done, total)
			}
		},
		Learner:    w.Learner,
		Journal:    journal.kept(),
		OnSnapshot: func(s filter.Snapshot) { last = s },
		Now:        w.Now,
	}
	report, err := s.Run(ctx)
	if err != nil {
		journal.tellKept(w)
		return nil, journal.explain(err)
	}
	report.Fields = used(choice)
	report.Rows.Unreadable += unread.count()
	report.Rows.In += unread.count()
	if report.Rows.In == 0 {
		report.Notes = append(report.Notes, c.Input.Title()+" has no rows, so there was nothing to judge")
	}
	if last == nil {
		if c.Output.Snapshot != "" {
			report.Notes = append(report.Notes, fmt.Sprintf("no snapshot was trained, so %s was not written", c.Output.Snapshot))
		}
		if err := snapshotFile.Drop(); err != nil {
			return nil, err
		}
		snapshotFile = nil
	}
	err = cmp.Or(
		snapshotFile.Fill(func(w io.Writer) error { _, err := last.WriteTo(w); return err }),
		reportFile.Fill(func(w io.Writer) error { return writeReport(w, report) }),
		unread.finish(),
		stamps.check())
	if err != nil {
		return nil, err
	}
	w.Marks.Phase("place")
	if err := sink.CommitWith(ctx, snapshotFile, reportFile, unread.target()); err != nil {
		return report, err
	}
	journal.remove()
	return report, nil
}

// optionsOf gives what files are read and written with.
func optionsOf(c *config.Config, w Watch) table.Options {
	options := table.DefaultOptions(formats()...)
	options.InFormat, options.Delimiter = c.Input.Format, c.Input.Delimiter
	options.OutFormat, options.Replace = c.Output.Format, c.Output.Replace
	options.Mark, options.Disk, options.Pipe = marker(w.Marks), w.Disk, w.Out
	if w.Marks != nil { // one record batch is read while another is used, and more waits for the collector
		options.MostBatch = c.MemoryLimit() / 3
	}
	return options
}

// open reads the input's beginning: the columns tell what there is to learn from, the first rows how the file is
// compressed, which the output takes over.
func open(ctx context.Context, files []table.Input, record filter.Record, options table.Options) (*table.Source, error) {
	source, err := table.Open(files, record, options)
	if err != nil {
		return nil, err
	}
	batch, err := source.Next(ctx)
	switch {
	case err == nil:
		batch.Release()
	case err != io.EOF: // a file without rows is no fault
		source.Close()
		return nil, err
	}
	return source, nil
}

func writeReport(w io.Writer, report *filter.Report) error {
	e := json.NewEncoder(w)
	e.SetEscapeHTML(false)
	e.SetIndent("", "  ")
	return e.Encode(report)
}

// used turns the connector's choice into the report's form.
func used(choice []table.Choice) []filter.FieldUse {
	uses := make([]filter.FieldUse, len(choice))
	for i, c := range choice {
		u := filter.FieldUse{Path: c.Column, Use: "left-out", Why: c.Why}
		switch {
		case c.Used:
			u.Use, u.Kind = "feature", c.Kind.String()
		case c.Why == "the label", c.Why == "the source", c.Why == "the time":
			u.Use, u.Why = c.Why[len("the "):], ""
		}
		uses[i] = u
	}
	return uses
}

// ErrGate says that --gate can't tell: there is no estimate of the share of wrong labels.
var ErrGate = errors.New("no estimate of the share of wrong labels, so the gate can't be judged")

// Above tells whether the report's estimated share of wrong labels is above the gate; gate 0 is none. The error is
// ErrGate when there is a gate but no estimate.
func Above(r *filter.Report, gate float64) (bool, error) {
	switch {
	case gate == 0:
		return false, nil
	case r.Noise == nil || !(float64(r.Noise.Share.Value) >= 0):
		return false, ErrGate
	}
	return float64(r.Noise.Share.Value) > gate, nil
}
