// Package jsonlines reads and writes tables of JSON lines: one JSON object (RFC 8259) on each line, UTF-8.
//
// The columns are the members of the first objects, in the order they are met. Members that are always numbers,
// booleans or moments are of type [table.CellType], so that each keeps its digits; arrays of numbers of one size are
// vectors, in which null is NaN; objects and other arrays are kept as JSON text and are no features. What is null or
// absent is null. A hidden last column holds each line's bytes, and the writer puts the tags before the object's closing
// brace: a line comes back as it was, with members that were not among the first objects too.
//
// A line that is no object, repeats a member's name or has a value that can't be used goes to ReadOptions.Unreadable,
// and the rest goes on. Blank lines are no rows.
package jsonlines
