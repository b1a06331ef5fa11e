// Package textrows is what formats of text with one record after the other have in common: walking through the file row
// by row, making record batches of the rows, setting rows aside that can't be read, and writing rows of which some come
// as the bytes they were. What a row is, and what its bytes mean, is up to the format.
package textrows
