// Package spell writes single values of Arrow arrays as text, for formats of text.
//
//	booleans            true, false
//	integers            decimal digits
//	floats              the shortest decimal that reads back the same; JSON has no NaN and infinities: null there, else NaN, inf, -inf
//	decimals            all digits of their scale
//	text                as it is; bytes that are not UTF-8 become U+FFFD in JSON
//	binary              base64 with padding (RFC 4648, section 4)
//	timestamps          RFC 3339 in their zone; those without a zone have none here either
//	dates, times of day 2026-05-01, 07:30:00.25
//	other years         moments outside of the years 0 to 9999, which RFC 3339 has not: their count of units
//	durations           their count of units
//	lists, vectors      JSON arrays
//	structs             JSON objects
//	maps                JSON arrays of {"key":…,"value":…}, which keep repeats and order
//	intervals           months, or JSON objects of their parts
//	dictionaries, runs, unions, extensions: the value beneath
package spell

import (
	"fmt"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"

	"labelweir/connectors/table"
)

// Speller appends the text of value i to dst. A null appends nothing in plain text, and null in JSON. It belongs to one
// goroutine.
type Speller func(dst []byte, i int) (text []byte, null bool)

// form is how text must be treated to become JSON.
type form uint8

const (
	literal form = iota // is JSON already, or null
	text                // to be quoted
)

// Plain gives the speller of an array for formats that put a value's text between delimiters. Nested values are JSON.
func Plain(arr arrow.Array) (Speller, error) {
	s, _, err := of(arr, false)
	return s, err
}

// JSON gives the speller of an array that writes JSON values.
func JSON(arr arrow.Array) (Speller, error) {
	s, f, err := of(arr, true)
	switch {
	case err != nil:
		return nil, err
	case f == text:
		s = quoting(s)
	}
	return func(dst []byte, i int) ([]byte, bool) {
		dst, null := s(dst, i)
		if null {
			dst = append(dst, "null"...)
		}
		return dst, null
	}, nil
}

// of gives an array's speller and the form of what it appends; json tells that what has no JSON must be null.
func of(arr arrow.Array, json bool) (Speller, form, error) {
	switch a := arr.(type) {
	case *array.Null:
		return func(dst []byte, _ int) ([]byte, bool) { return dst, true }, literal, nil
	case *array.Dictionary:
		return indexed(a, json)
	case *array.RunEndEncoded:
		s, f, err := of(a.Values(), json)
		return func(dst []byte, i int) ([]byte, bool) { return s(dst, a.GetPhysicalIndex(i)) }, f, err
	case *table.Cells:
		return cells(a, json)
	case array.ExtensionArray:
		return of(a.Storage(), json)
	case *array.SparseUnion, *array.DenseUnion, *array.Map, array.ListLike, *array.Struct:
		s, err := nested(arr)
		if _, union := arr.(array.Union); union {
			return s, literal, err
		}
		return orNull(arr, s), literal, err
	}
	if s := number(arr, json); s != nil {
		return orNull(arr, s), literal, nil
	}
	if s := moment(arr); s != nil {
		return orNull(arr, s), text, nil
	}
	if s := words(arr); s != nil {
		return orNull(arr, s), text, nil
	}
	if s := interval(arr); s != nil {
		return orNull(arr, s), literal, nil
	}
	return nil, literal, fmt.Errorf("values of type %s can't be written as text", arr.DataType())
}

// orNull asks the array for nulls first.
func orNull(arr arrow.Array, s Speller) Speller {
	if arr.NullN() == 0 {
		return s
	}
	return func(dst []byte, i int) ([]byte, bool) {
		if arr.IsNull(i) {
			return dst, true
		}
		return s(dst, i)
	}
}

// indexed spells a dictionary's values.
func indexed(a *array.Dictionary, json bool) (Speller, form, error) {
	s, f, err := of(a.Dictionary(), json)
	return orNull(a, func(dst []byte, i int) ([]byte, bool) { return s(dst, a.GetValueIndex(i)) }), f, err
}
