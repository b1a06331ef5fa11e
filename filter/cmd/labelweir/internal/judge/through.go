package main

import (
	"context"
	"fmt"
	"io"

	"labelweir/filter"
	"labelweir/model"
)

// sweepTable has the product sweep the whole table as one window, on one core.
func sweepTable(ctx context.Context, t *model.Table) ([]model.Score, *model.Facts, error) {
	c := filter.Default()
	c.Records, c.Workers = max(c.Records, t.Rows()), 1
	var facts *model.Facts
	sink := &tags{}
	s := filter.Sweep{
		Config:     c,
		Open:       func(context.Context) (filter.Source, error) { return &tableSource{table: t}, nil },
		Sink:       sink,
		OnSnapshot: func(s filter.Snapshot) { facts = s.Facts() },
	}
	report, err := s.Run(ctx)
	if err != nil {
		return nil, nil, err
	}
	if facts == nil {
		return nil, nil, fmt.Errorf("no snapshot: %v", report.Notes)
	}
	class := map[string]int32{"": -1}
	for i, name := range facts.Classes {
		class[name] = int32(i)
	}
	scores := make([]model.Score, len(sink.list))
	for i, tag := range sink.list {
		scores[i] = model.Score{P: tag.Score, Margin: tag.Margin, Implied: class[tag.Implied], Reason: tag.Reason}
	}
	return scores, facts, nil
}

// tableSource is a filter.Source over a table in memory, in one batch.
type tableSource struct {
	table *model.Table
	read  bool
}

func (s *tableSource) Next(ctx context.Context) (*filter.Batch, error) {
	if err := ctx.Err(); err != nil {
		return nil, err
	}
	if s.read {
		return nil, io.EOF
	}
	s.read = true
	return &filter.Batch{Table: s.table, Release: func() {}}, nil
}

func (s *tableSource) Close() error { return nil }
