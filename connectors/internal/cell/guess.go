package cell

import (
	"github.com/apache/arrow/go/v16/arrow"
)

// Guess is what the cells of one column, seen one after the other, can mean together. The zero Guess has seen none.
type Guess struct {
	values                      int // cells that have a value
	notBool, notInt, notNumber  bool
	date, local, zoned, notTime bool
	digits                      int // most digits behind a second
}

// Watch takes in the next cell.
func (g *Guess) Watch(b []byte) {
	if Missing(b) {
		return
	}
	g.values++
	if !g.notNumber {
		g.watchNumber(b)
	}
	if !g.notBool {
		_, ok := Bool(b)
		g.notBool = !ok
	}
	if !g.notTime {
		_, _, digits, style := Moment(b)
		g.digits = max(g.digits, digits)
		g.date, g.local, g.zoned = g.date || style == Date, g.local || style == Local, g.zoned || style == Zoned
		g.notTime = style == NoMoment
	}
}

// watchNumber: a zero before a digit makes a code, not a number: "0071".
func (g *Guess) watchNumber(b []byte) {
	if zeroLed(trim(b)) {
		g.notNumber = true
		return
	}
	if !g.notInt {
		_, ok := Int(b)
		g.notInt = !ok
	}
	if g.notInt {
		_, ok := Number(b)
		g.notNumber = !ok
	}
}

// Type is what the cells mean: bool, int64, float64, a timestamp, or nil for text. Dates are timestamps at midnight; as
// soon as one cell names its zone, all must.
func (g *Guess) Type() arrow.DataType {
	switch {
	case g.values == 0:
		return nil
	case !g.notBool:
		return arrow.FixedWidthTypes.Boolean
	case !g.notNumber && !g.notInt:
		return arrow.PrimitiveTypes.Int64
	case !g.notNumber:
		return arrow.PrimitiveTypes.Float64
	case g.notTime, g.zoned && (g.date || g.local):
		return nil
	}
	t := &arrow.TimestampType{Unit: arrow.Microsecond}
	if g.digits > 6 {
		t.Unit = arrow.Nanosecond
	}
	if g.zoned {
		t.TimeZone = "UTC"
	}
	return t
}
