package spell

import (
	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
)

// nested is the speller of lists, maps, structs and unions, which writes JSON; nulls of unions are those of their
// children, nulls of the others are not asked for here.
func nested(arr arrow.Array) (Speller, error) {
	switch a := arr.(type) {
	case *array.Map:
		key, err := JSON(a.Keys())
		if err != nil {
			return nil, err
		}
		item, err := JSON(a.Items())
		return entries(a, key, item), err
	case *array.Struct:
		return object(a)
	case *array.SparseUnion:
		return union(a, func(i int) int { return i })
	case *array.DenseUnion:
		return union(a, func(i int) int { return int(a.ValueOffset(i)) })
	case array.ListLike:
		item, err := JSON(a.ListValues())
		return list(a, item), err
	}
	return nil, nil
}

func list(a array.ListLike, item Speller) Speller {
	return func(dst []byte, i int) ([]byte, bool) {
		dst = append(dst, '[')
		lo, hi := a.ValueOffsets(i)
		for k := lo; k < hi; k++ {
			if k > lo {
				dst = append(dst, ',')
			}
			dst, _ = item(dst, int(k))
		}
		return append(dst, ']'), false
	}
}

func entries(a *array.Map, key, item Speller) Speller {
	return func(dst []byte, i int) ([]byte, bool) {
		dst = append(dst, '[')
		lo, hi := a.ValueOffsets(i)
		for k := lo; k < hi; k++ {
			if k > lo {
				dst = append(dst, ',')
			}
			dst, _ = key(append(dst, `{"key":`...), int(k))
			dst, _ = item(append(dst, `,"value":`...), int(k))
			dst = append(dst, '}')
		}
		return append(dst, ']'), false
	}
}

func object(a *array.Struct) (Speller, error) {
	fields := a.DataType().(*arrow.StructType).Fields()
	names, values := make([][]byte, len(fields)), make([]Speller, len(fields))
	for k, f := range fields {
		names[k] = append(AppendString(nil, f.Name), ':')
		s, err := JSON(a.Field(k))
		if err != nil {
			return nil, err
		}
		values[k] = s
	}
	return func(dst []byte, i int) ([]byte, bool) {
		dst = append(dst, '{')
		for k := range values {
			if k > 0 {
				dst = append(dst, ',')
			}
			dst, _ = values[k](append(dst, names[k]...), i)
		}
		return append(dst, '}'), false
	}, nil
}

// union spells the child's value as JSON, null too, so that a cell tells 1 from "1".
func union(a array.Union, at func(int) int) (Speller, error) {
	children := make([]Speller, a.NumFields())
	for k := range children {
		s, err := JSON(a.Field(k))
		if err != nil {
			return nil, err
		}
		children[k] = s
	}
	return func(dst []byte, i int) ([]byte, bool) {
		lo := len(dst)
		dst, null := children[a.ChildID(i)](dst, at(i))
		if null {
			dst = dst[:lo]
		}
		return dst, null
	}, nil
}
