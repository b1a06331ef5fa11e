package model

import (
	"bytes"
	"fmt"
)

// AppendBinary appends the facts to b in the form that a saved snapshot has them in; it never fails. The lists must have
// the lengths that Fit gives them: an entry for each class and source.
func (f *Facts) AppendBinary(b []byte) ([]byte, error) {
	var out bytes.Buffer
	e := newEncoder(&out)
	e.facts(f)
	e.flush()
	return append(b, out.Bytes()...), nil
}

// UnmarshalBinary reads what AppendBinary wrote, and nothing else may follow. The error wraps ErrSnapshot; memory is
// taken in proportion to b.
func (f *Facts) UnmarshalBinary(b []byte) error {
	d := &decoder{b: b}
	var read Facts
	d.facts(&read)
	if d.err == nil && d.at < len(d.b) {
		d.fail(fmt.Errorf("%d bytes too many", len(d.b)-d.at))
	}
	if d.err != nil {
		return fmt.Errorf("%w: %w", ErrSnapshot, d.err)
	}
	*f = read
	return nil
}
