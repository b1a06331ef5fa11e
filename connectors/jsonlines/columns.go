package jsonlines

import (
	"math"

	"github.com/apache/arrow/go/v16/arrow"

	"labelweir/connectors/internal/cell"
	"labelweir/connectors/jsonlines/internal/scan"
	"labelweir/connectors/table"
)

// columns are the columns of a file.
type columns struct {
	names []string
	types []arrow.DataType
	index map[string]int // of each name
}

// likeColumns takes the columns of a schema.
func likeColumns(like *arrow.Schema) *columns {
	c := &columns{index: map[string]int{}}
	for i, f := range like.Fields() {
		if i != table.RawIndex(like) {
			c.add(f.Name, f.Type)
		}
	}
	return c
}

func (c *columns) add(name string, dt arrow.DataType) {
	if _, known := c.index[name]; !known {
		c.index[name] = len(c.names)
		c.names = append(c.names, name)
		c.types = append(c.types, dt)
	}
}

// schema is the schema of the record batches: the columns and the hidden one.
func (c *columns) schema() *arrow.Schema {
	var fields []arrow.Field
	for i, name := range c.names {
		fields = append(fields, arrow.Field{Name: name, Type: c.types[i], Nullable: true})
	}
	return arrow.NewSchema(append(fields, table.RawField(formatName)), nil)
}

// peekBytes bounds the text looked at for the columns.
const peekBytes = 64 << 20

// infer finds the columns of the first lines.
func infer(l *lines, peek int) (*columns, error) {
	c := &columns{index: map[string]int{}}
	var habits []habit
	var name []byte
	var scratch []float64
	first, read := "", 0
	for start := l.Feed.Offset(); read < peek && l.Feed.Offset() < start+peekBytes; {
		ok, err := l.Next()
		if err != nil {
			return nil, err
		}
		if !ok {
			break
		}
		if l.Reason != "" {
			if first == "" {
				first = "the first line can't be read: " + l.Reason
			}
			continue
		}
		read++
		for _, m := range l.scan.Members {
			var key []byte
			key, name = textOf(l.Row, m.Key, name)
			i, known := c.index[string(key)]
			if !known {
				i = len(c.names)
				c.add(string(key), nil)
				habits = append(habits, habit{})
			}
			habits[i].watch(l.Row, m, &scratch)
		}
		if len(c.names) > limits().Members {
			return nil, l.Fault("has too many different members in its first objects", "check that they are records of one kind", nil)
		}
	}
	switch {
	case read > 0:
	case first != "":
		return nil, table.At(table.Place{Path: l.Path}, table.ErrUnreadable, first, "write one JSON object on each line (jq -c '.[]' makes lines of an array)", nil)
	default:
		return nil, table.At(table.Place{Path: l.Path}, table.ErrUnreadable, "has no lines", "check the step that wrote it", nil)
	}
	room := mostNumbers
	for i := range habits {
		if room -= habits[i].size; room < 0 { // kept as JSON
			habits[i].others = true
		}
		c.types[i] = habits[i].dataType()
	}
	return c, nil
}

// mostNumbers is the most numbers that the vectors of one row may have together: a bound for what a row can make us
// allocate.
const mostNumbers = 1 << 20

// habit is what the first lines show of one member.
type habit struct {
	bools, numbers, strings, vectors, others bool // kinds of values met
	objects                                  bool // among the others
	guess                                    cell.Guess
	size                                     int // of the vectors
	text                                     []byte
}

// watch takes in one member of the line.
func (h *habit) watch(line []byte, m scan.Member, scratch *[]float64) {
	switch m.Kind {
	case scan.Bool:
		h.bools = true
	case scan.Number:
		h.numbers = true
		h.guess.Watch(line[m.Value.Lo:m.Value.Hi])
	case scan.String:
		h.strings = true
		var text []byte
		text, h.text = textOf(line, m.Value, h.text)
		h.guess.Watch(text)
	case scan.Array:
		x, ok := scan.Numbers((*scratch)[:0], line[m.Value.Lo:m.Value.Hi], math.NaN(), mostNumbers)
		if *scratch = x; !ok || len(x) == 0 || h.vectors && len(x) != h.size {
			h.others = true
		} else {
			h.vectors, h.size = true, len(x)
		}
	case scan.Object:
		h.others, h.objects = true, true
	}
}

// dataType is the type of the column. Scalars of several kinds are text.
func (h *habit) dataType() arrow.DataType {
	scalars := h.bools || h.numbers || h.strings
	switch {
	case h.vectors && !h.others && !scalars:
		return arrow.FixedSizeListOf(int32(h.size), arrow.PrimitiveTypes.Float64)
	case h.objects:
		return table.NewCellType(arrow.StructOf())
	case h.vectors || h.others:
		return table.NewCellType(arrow.ListOf(arrow.Null))
	case h.bools && !h.numbers && !h.strings:
		return table.NewCellType(arrow.FixedWidthTypes.Boolean)
	case h.numbers && !h.bools && !h.strings:
		if dt := h.guess.Type(); dt != nil {
			return table.NewCellType(dt)
		}
		return table.NewCellType(arrow.PrimitiveTypes.Float64)
	case h.strings && !h.numbers && !h.bools:
		if dt := h.guess.Type(); dt != nil && dt.ID() == arrow.TIMESTAMP {
			return table.NewCellType(dt)
		}
	}
	return arrow.BinaryTypes.String
}
