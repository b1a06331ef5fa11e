// Package table is what all table formats have in common: which columns become label, source, time and features, how
// their values are read, and how tagged rows are gathered and written under names that appear only when all is well.
//
// A file format implements [Reader] and [Writer] and describes itself as a [Format].
package table
