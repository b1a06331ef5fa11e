package window

import "errors"

// What can go wrong in this package. Callers use errors.Is.
var (
	ErrPolicy  = errors.New("window policy")                    // a bound that makes no sense
	ErrColumns = errors.New("columns differ from the window's") // another name, kind or size
	ErrBytes   = errors.New("no row fits the window's bytes")   // Policy.Bytes is smaller than one row
	ErrDamaged = errors.New("not a readable window")            // foreign, cut or damaged bytes
)
