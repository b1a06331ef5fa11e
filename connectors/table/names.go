package table

import (
	"errors"
	"fmt"
	"math"
	"strconv"
	"unicode/utf8"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
)

// isText tells whether a type holds text or bytes.
func isText(dt arrow.DataType) bool {
	switch dt.ID() {
	case arrow.STRING, arrow.LARGE_STRING, arrow.STRING_VIEW:
		return true
	}
	return isBytes(dt)
}

// isBytes tells whether a type holds bytes that need not be text.
func isBytes(dt arrow.DataType) bool {
	switch dt.ID() {
	case arrow.BINARY, arrow.LARGE_BINARY, arrow.BINARY_VIEW, arrow.FIXED_SIZE_BINARY:
		return true
	}
	return false
}

// isName tells whether values of a type can stand for a class or level: text, whole numbers, booleans, and
// dictionaries of them.
func isName(dt arrow.DataType) bool {
	if d, ok := dt.(*arrow.DictionaryType); ok {
		dt = plain(d.ValueType)
	}
	return isText(dt) || dt.ID() == arrow.BOOL || arrow.IsInteger(dt.ID()) || arrow.IsFloating(dt.ID())
}

// plain is the storage type of an extension, else the type itself.
func plain(dt arrow.DataType) arrow.DataType {
	if ext, ok := dt.(arrow.ExtensionType); ok {
		return ext.StorageType()
	}
	return dt
}

// namer appends the name of row i of one array; none is set for a missing one.
type namer func(dst []byte, i int) (name []byte, none bool, err error)

// newNamer returns the namer of an array of a type for which isName holds and which is not a dictionary.
func newNamer(arr arrow.Array) (namer, error) {
	switch a := arr.(type) {
	case *array.String:
		return textNamer(a.IsNull, a.Value), nil
	case *array.LargeString:
		return textNamer(a.IsNull, a.Value), nil
	case *array.StringView:
		return textNamer(a.IsNull, a.Value), nil
	case *array.Binary:
		return textNamer(a.IsNull, a.Value), nil
	case *array.LargeBinary:
		return textNamer(a.IsNull, a.Value), nil
	case *array.BinaryView:
		return textNamer(a.IsNull, a.Value), nil
	case *array.FixedSizeBinary:
		return textNamer(a.IsNull, a.Value), nil
	case *array.Boolean:
		return func(dst []byte, i int) ([]byte, bool, error) {
			return strconv.AppendBool(dst, a.IsValid(i) && a.Value(i)), a.IsNull(i), nil
		}, nil
	case *array.Int8:
		return intNamer(a.IsNull, a.Int8Values()), nil
	case *array.Int16:
		return intNamer(a.IsNull, a.Int16Values()), nil
	case *array.Int32:
		return intNamer(a.IsNull, a.Int32Values()), nil
	case *array.Int64:
		return intNamer(a.IsNull, a.Int64Values()), nil
	case *array.Uint8:
		return intNamer(a.IsNull, a.Uint8Values()), nil
	case *array.Uint16:
		return intNamer(a.IsNull, a.Uint16Values()), nil
	case *array.Uint32:
		return intNamer(a.IsNull, a.Uint32Values()), nil
	case *array.Uint64:
		vals := a.Uint64Values()
		return func(dst []byte, i int) ([]byte, bool, error) {
			return strconv.AppendUint(dst, vals[i], 10), a.IsNull(i), nil
		}, nil
	case *array.Float16, *array.Float32, *array.Float64:
		vals, err := appendNumbers(nil, arr)
		return wholeNamer(vals), err
	case array.ExtensionArray:
		return newNamer(a.Storage())
	}
	return nil, fmt.Errorf("no name can be read from %s", arr.DataType())
}

func textNamer[T string | []byte](null func(int) bool, value func(int) T) namer {
	return func(dst []byte, i int) ([]byte, bool, error) {
		if null(i) {
			return dst, true, nil
		}
		return append(dst, value(i)...), false, nil
	}
}

func intNamer[T int8 | int16 | int32 | int64 | uint8 | uint16 | uint32](null func(int) bool, vals []T) namer {
	return func(dst []byte, i int) ([]byte, bool, error) {
		return strconv.AppendInt(dst, int64(vals[i]), 10), null(i), nil
	}
}

// wholeNamer names floats that are whole numbers like integers; beyond 2⁵³ neighbours can't be told apart.
func wholeNamer(vals []float64) namer {
	return func(dst []byte, i int) ([]byte, bool, error) {
		v := vals[i]
		if math.IsNaN(v) {
			return dst, true, nil
		}
		if v != math.Trunc(v) || math.Abs(v) > 1<<53 {
			return dst, false, fractional(v)
		}
		return strconv.AppendInt(dst, int64(v), 10), false, nil
	}
}

// fractional is a number that can't name a class.
type fractional float64

func (f fractional) Error() string {
	return fmt.Sprintf("%v is not a whole number, so it can't name a class or level", float64(f))
}

var errNotText = errors.New("the bytes are not UTF-8 text")

// coder gives each name a code by first appearance, row by row, whatever the record batches and dictionaries are.
type coder struct {
	names []string // only grows
	codes map[string]int32
	buf   []byte

	dict arrow.ArrayData // dictionary that memo belongs to
	memo []int32         // code of each of its values; unknown until a row has it
}

const (
	missing = int32(-1)
	unknown = int32(-2)
)

func newCoder() *coder { return &coder{codes: map[string]int32{}} }

// list is the names so far, safe to keep while more are added.
func (c *coder) list() []string { return c.names[:len(c.names):len(c.names)] }

// append appends one code a row of arr to dst. When a row has no usable name, bad is its index and err says why.
func (c *coder) append(dst []int32, arr arrow.Array) (codes []int32, bad int, err error) {
	if ext, ok := arr.(array.ExtensionArray); ok {
		arr = ext.Storage()
	}
	if d, ok := arr.(*array.Dictionary); ok {
		return c.appendIndexed(dst, d)
	}
	name, err := newNamer(arr)
	if err != nil {
		return dst, 0, err
	}
	for i := range arr.Len() {
		code, err := c.code(name, i)
		if err != nil {
			return dst, i, err
		}
		dst = append(dst, code)
	}
	return dst, 0, nil
}

// code is the code of row i under name, a new one when the name is new.
func (c *coder) code(name namer, i int) (int32, error) {
	b, none, err := name(c.buf[:0], i)
	c.buf = b
	if err != nil || none {
		return missing, err
	}
	if code, ok := c.codes[string(b)]; ok {
		return code, nil
	}
	if !utf8.Valid(b) {
		return missing, errNotText
	}
	code := int32(len(c.names))
	s := string(b)
	c.names = append(c.names, s)
	c.codes[s] = code
	return code, nil
}

func (c *coder) appendIndexed(dst []int32, d *array.Dictionary) ([]int32, int, error) {
	levels := d.Dictionary()
	name, err := newNamer(levels)
	if err != nil {
		return dst, 0, err
	}
	if c.dict != levels.Data() {
		c.dict, c.memo = levels.Data(), c.memo[:0]
		for range levels.Len() {
			c.memo = append(c.memo, unknown)
		}
	}
	for i := range d.Len() {
		if d.IsNull(i) {
			dst = append(dst, missing)
			continue
		}
		k := d.GetValueIndex(i)
		if c.memo[k] == unknown {
			if c.memo[k], err = c.code(name, k); err != nil {
				c.memo[k] = unknown
				return dst, i, err
			}
		}
		dst = append(dst, c.memo[k])
	}
	return dst, 0, nil
}
