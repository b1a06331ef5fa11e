// Package arrowfile reads and writes Arrow IPC files and streams: see [Formats].
//
// The reader tells the file format from the stream format by the first bytes and holds one record batch in memory at a
// time. Arrow's reader takes lengths, offsets and indices on trust and may panic on damaged bytes; here they are looked at
// first, and what remains is caught and becomes a table.Error that names file, record batch and column.
package arrowfile
