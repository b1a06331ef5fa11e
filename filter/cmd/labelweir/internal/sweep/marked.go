package sweep

import (
	"context"

	"labelweir/connectors/table"
	"labelweir/filter"
	"labelweir/filter/cmd/labelweir/internal/guard"
)

// marker hands the places that readers tell on to m; nil when nobody wants them.
func marker(m *guard.Marks) func(at table.Place, column string) {
	if m == nil {
		return nil
	}
	return func(at table.Place, column string) {
		switch {
		case at.Batch > 0:
			m.At(at.Path, "record batch", int64(at.Batch), column)
		case at.Group > 0:
			m.At(at.Path, "row group", int64(at.Group), column)
		default:
			m.At(at.Path, "line", at.Line, column)
		}
	}
}

// marked is a source that marks when bytes of its file are being read.
type marked struct {
	filter.Source
	marks *guard.Marks
}

// openMarked marks the opening of a source, too: it reads the file's beginning.
func openMarked(m *guard.Marks, file string, open func() (filter.Source, error)) (filter.Source, error) {
	m.Enter(file)
	defer m.Leave()
	m.At(file, "", 0, "") // not known yet
	source, err := open()
	if err != nil || m == nil {
		return source, err
	}
	return &marked{source, m}, nil
}

// Next implements filter.Source.
func (s *marked) Next(ctx context.Context) (*filter.Batch, error) {
	s.marks.Resume()
	defer s.marks.Leave()
	return s.Source.Next(ctx)
}
