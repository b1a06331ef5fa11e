package parquet

import (
	"encoding/binary"
	"errors"
	"fmt"
)

// walker goes through a value in Thrift's compact protocol without making anything of it, and refuses lengths that go
// beyond the bytes: the library's own reader allocates as much as they say. Source:
// https://github.com/apache/thrift/blob/master/doc/specs/thrift-compact-protocol.md
type walker struct {
	b     []byte
	depth int
}

// Types of the compact protocol.
const (
	typeStop   = 0
	typeTrue   = 1
	typeFalse  = 2
	typeByte   = 3
	typeI16    = 4
	typeI32    = 5
	typeI64    = 6
	typeDouble = 7
	typeBinary = 8
	typeList   = 9
	typeSet    = 10
	typeMap    = 11
	typeStruct = 12
)

var errShort = errors.New("it ends before its last value")

// mostNested is far beyond the five levels of a Parquet footer.
const mostNested = 64

// value skips one value of a type; inList tells whether a boolean has a byte of its own.
func (w *walker) value(kind byte, inList bool) error {
	switch kind {
	case typeTrue, typeFalse:
		if inList {
			return w.skip(1)
		}
		return nil
	case typeByte:
		return w.skip(1)
	case typeI16, typeI32, typeI64:
		_, err := w.number()
		return err
	case typeDouble:
		return w.skip(8)
	case typeBinary:
		n, err := w.number()
		if err != nil {
			return err
		}
		return w.skip(n)
	case typeList, typeSet:
		return w.list()
	case typeMap:
		return w.pairs()
	case typeStruct:
		return w.fields()
	}
	return fmt.Errorf("value of unknown type %d", kind)
}

// fields skips a struct.
func (w *walker) fields() error {
	if w.depth++; w.depth > mostNested {
		return errors.New("values are nested too deep")
	}
	defer func() { w.depth-- }()
	for {
		head, err := w.one()
		if err != nil {
			return err
		}
		kind := head & 0x0F
		if kind == typeStop {
			return nil
		}
		if head>>4 == 0 { // the field's number is no small step from the last
			if _, err := w.number(); err != nil {
				return err
			}
		}
		if err := w.value(kind, false); err != nil {
			return err
		}
	}
}

// list skips a list or set; each of its values takes a byte at least.
func (w *walker) list() error {
	if w.depth++; w.depth > mostNested {
		return errors.New("values are nested too deep")
	}
	defer func() { w.depth-- }()
	head, err := w.one()
	if err != nil {
		return err
	}
	n := uint64(head >> 4)
	if n == 15 {
		if n, err = w.number(); err != nil {
			return err
		}
	}
	if n > uint64(len(w.b)) {
		return fmt.Errorf("a list of %d values in %d bytes", n, len(w.b))
	}
	for range n {
		if err := w.value(head&0x0F, true); err != nil {
			return err
		}
	}
	return nil
}

// pairs skips a map.
func (w *walker) pairs() error {
	n, err := w.number()
	if err != nil || n == 0 {
		return err
	}
	if n > uint64(len(w.b)) {
		return fmt.Errorf("a map of %d pairs in %d bytes", n, len(w.b))
	}
	kinds, err := w.one()
	if err != nil {
		return err
	}
	for range n {
		if err := w.value(kinds>>4, true); err != nil {
			return err
		}
		if err := w.value(kinds&0x0F, true); err != nil {
			return err
		}
	}
	return nil
}

func (w *walker) one() (byte, error) {
	if len(w.b) == 0 {
		return 0, errShort
	}
	c := w.b[0]
	w.b = w.b[1:]
	return c, nil
}

func (w *walker) number() (uint64, error) {
	v, n := binary.Uvarint(w.b)
	if n <= 0 {
		return 0, errShort
	}
	w.b = w.b[n:]
	return v, nil
}

func (w *walker) skip(n uint64) error {
	if n > uint64(len(w.b)) {
		return errShort
	}
	w.b = w.b[n:]
	return nil
}
