package spell

import (
	"bytes"
	"encoding/base64"
	"unicode/utf8"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"

	"labelweir/connectors/internal/cell"
	"labelweir/connectors/table"
)

// words is the speller of an array of text or bytes, nil for another.
func words(arr arrow.Array) Speller {
	switch a := arr.(type) {
	case *array.String:
		return letters(a.Value)
	case *array.LargeString:
		return letters(a.Value)
	case *array.StringView:
		return letters(a.Value)
	case *array.Binary:
		return base(a.Value)
	case *array.LargeBinary:
		return base(a.Value)
	case *array.BinaryView:
		return base(a.Value)
	case *array.FixedSizeBinary:
		return base(a.Value)
	}
	return nil
}

func letters(value func(int) string) Speller {
	return func(dst []byte, i int) ([]byte, bool) { return append(dst, value(i)...), false }
}

func base(value func(int) []byte) Speller {
	return func(dst []byte, i int) ([]byte, bool) { return base64.StdEncoding.AppendEncode(dst, value(i)), false }
}

// quoting makes JSON strings of what s appends.
func quoting(s Speller) Speller {
	var scratch []byte
	return func(dst []byte, i int) ([]byte, bool) {
		lo := len(dst)
		dst, null := s(append(dst, '"'), i)
		if null {
			return dst[:lo], true
		}
		if !clean(dst[lo+1:]) {
			scratch = append(scratch[:0], dst[lo+1:]...)
			dst = escape(dst[:lo+1], scratch)
		}
		return append(dst, '"'), false
	}
}

// clean tells whether text may stand between the quotes of a JSON string as it is.
func clean(b []byte) bool {
	for _, c := range b {
		if c < ' ' || c == '"' || c == '\\' {
			return false
		}
		if c >= utf8.RuneSelf {
			return utf8.Valid(b) && bytes.IndexFunc(b, special) < 0
		}
	}
	return true
}

func special(r rune) bool { return r < ' ' || r == '"' || r == '\\' }

// escape appends text as it stands inside a JSON string (RFC 8259, section 7).
func escape(dst, b []byte) []byte {
	const hex = "0123456789abcdef"
	for len(b) > 0 {
		r, n := utf8.DecodeRune(b)
		switch {
		case r == '"' || r == '\\':
			dst = append(dst, '\\', byte(r))
		case r == '\n':
			dst = append(dst, `\n`...)
		case r == '\r':
			dst = append(dst, `\r`...)
		case r == '\t':
			dst = append(dst, `\t`...)
		case r < ' ':
			dst = append(dst, '\\', 'u', '0', '0', hex[r>>4], hex[r&15])
		default:
			dst = utf8.AppendRune(dst, r)
		}
		b = b[n:]
	}
	return dst
}

// AppendString appends text as a JSON string.
func AppendString(dst []byte, s string) []byte {
	return append(escape(append(dst, '"'), []byte(s)), '"')
}

// cells spells cells: as they are in plain text. In JSON a cell that parses as what its column means is a JSON value of
// that kind, another one is a string.
func cells(a *table.Cells, json bool) (Speller, form, error) {
	store := a.Storage().(*array.String)
	plain := orNull(store, letters(store.Value))
	if !json {
		return plain, text, nil
	}
	str := quoting(plain)
	means := a.DataType().(*table.CellType).Means.ID()
	if arrow.IsNested(means) { // kept as JSON
		return plain, literal, nil
	}
	return func(dst []byte, i int) ([]byte, bool) {
		lo := len(dst)
		dst, null := plain(dst, i)
		if null {
			return dst, true
		}
		switch b := dst[lo:]; means {
		case arrow.BOOL:
			if v, ok := cell.Bool(b); ok {
				return appendBool(dst[:lo], v), false
			}
		case arrow.INT64, arrow.FLOAT64:
			if v, ok := cell.Number(b); ok {
				return appendNumber(dst[:lo], b, v), false
			}
		}
		return str(dst[:lo], i)
	}, literal, nil
}

func appendBool(dst []byte, v bool) []byte {
	if v {
		return append(dst, "true"...)
	}
	return append(dst, "false"...)
}

// appendNumber appends a number's own digits where JSON allows them, else those of its value. b may be what stands
// behind dst.
func appendNumber(dst, b []byte, v float64) []byte {
	b = bytes.TrimLeft(bytes.Trim(b, " \t"), "+")
	if isNumber(b) {
		return append(dst, b...)
	}
	dst, _ = Float(dst, v, 64, true)
	return dst
}

// isNumber tells whether b is a number as JSON writes them (RFC 8259, section 6).
func isNumber(b []byte) bool {
	b = bytes.TrimPrefix(b, []byte("-"))
	whole := digits(b)
	if whole == 0 || whole > 1 && b[0] == '0' {
		return false
	}
	if b = b[whole:]; len(b) > 0 && b[0] == '.' {
		n := digits(b[1:])
		if n == 0 {
			return false
		}
		b = b[1+n:]
	}
	if len(b) > 0 && b[0]|0x20 == 'e' {
		b = b[1:]
		if len(b) > 0 && (b[0] == '+' || b[0] == '-') {
			b = b[1:]
		}
		n := digits(b)
		return n > 0 && n == len(b)
	}
	return len(b) == 0
}

func digits(b []byte) int {
	for i, c := range b {
		if c < '0' || c > '9' {
			return i
		}
	}
	return len(b)
}
