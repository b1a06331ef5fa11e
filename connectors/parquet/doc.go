// Package parquet reads and writes Parquet files: see [Format].
//
// The reader goes through a file row group by row group, a few thousand rows of every column at a time. The library below
// takes lengths on trust and may panic on damaged bytes; the footer is looked at first, and what remains is caught and
// becomes a table.Error that names file, row group and column.
package parquet
