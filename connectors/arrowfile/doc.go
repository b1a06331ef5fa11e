// Package arrowfile reads labelled records from Arrow IPC files and streams and writes them back with their tags.
//
// [Open] gives a filter.Source. It tells the file format from the stream format by the first bytes, holds one record
// batch in memory at a time and hands out slices of at most Options.Rows records. Which columns become features is
// inferred from the schema and the first rows unless the record names them; [Source.Choice] tells what was chosen and
// why, and [Source.Record] gives the same choice as an explicit record, so that a second Open reads alike.
//
// [Create] gives a filter.Sink that writes every record, all columns as they came, followed by the weir_ columns, into
// the tagged file or the quarantine file. Nothing stands under a target's name before Commit.
//
// Arrow types do not come out of this package. Arrow's reader may panic on damaged bytes; that is caught here and
// becomes an [Error] that names file, record batch and column.
package arrowfile
