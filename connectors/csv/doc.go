// Package csv reads and writes tables of comma-separated text (RFC 4180; also with semicolons, tabs or bars between the
// cells).
//
// The first row is the header. What a column means is inferred from its first cells: booleans, whole numbers, numbers,
// moments, else text; columns of anything but text are of type [table.CellType], so that each cell keeps its letters.
// An empty cell is null. A hidden last column holds each row's bytes, and the writer puts the tags behind these bytes: a
// row comes back as it was, quotes and all. Only under a name that ends in .tsv it is written anew, with tabs, when it
// had none. A row that can't be read, or has more or fewer cells than the header, goes to ReadOptions.Unreadable, and the
// rest goes on. Blank lines are no rows.
package csv
