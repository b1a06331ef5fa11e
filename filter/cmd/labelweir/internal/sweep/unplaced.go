package sweep

import (
	"context"

	"labelweir/connectors/table"
)

// unplaced is a sink whose commit brings everything to the disk under no final name yet: that follows when the report
// is there, too. Its end is Run's.
type unplaced struct{ *table.Sink }

// Commit implements filter.Sink.
func (u unplaced) Commit(ctx context.Context) error { return u.Finish(ctx) }

// Close implements filter.Sink.
func (u unplaced) Close() error { return nil }
