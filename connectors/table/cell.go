package table

import (
	"fmt"
	"reflect"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
)

// CellType is a column of text whose cells mean values of another type and must come back as they were written. Storage
// is utf8; null is an empty cell, or one that is not there. Cells that don't parse as Means are missing where the column
// is used, and keep their text.
type CellType struct {
	arrow.ExtensionBase
	Means arrow.DataType // bool, int64, float64, or a timestamp
}

// NewCellType is the type of cells that mean values of a type.
func NewCellType(means arrow.DataType) *CellType {
	return &CellType{ExtensionBase: arrow.ExtensionBase{Storage: arrow.BinaryTypes.String}, Means: means}
}

// ArrayType implements arrow.ExtensionType.
func (*CellType) ArrayType() reflect.Type { return reflect.TypeFor[Cells]() }

// ExtensionName implements arrow.ExtensionType.
func (*CellType) ExtensionName() string { return "labelweir.cell" }

// ExtensionEquals implements arrow.ExtensionType.
func (c *CellType) ExtensionEquals(other arrow.ExtensionType) bool {
	o, ok := other.(*CellType)
	return ok && arrow.TypeEqual(c.Means, o.Means)
}

// Serialize implements arrow.ExtensionType.
func (c *CellType) Serialize() string { return c.Means.String() }

// Deserialize implements arrow.ExtensionType; the type exists in memory only.
func (*CellType) Deserialize(arrow.DataType, string) (arrow.ExtensionType, error) {
	return nil, fmt.Errorf("a column of cells can't be read from a file")
}

// String is the type of the values.
func (c *CellType) String() string { return c.Means.String() }

// Cells is an array of a CellType.
type Cells struct{ array.ExtensionArrayBase }
