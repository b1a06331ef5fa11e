package jsonlines

import (
	"bytes"
	"fmt"
	"io"

	"github.com/apache/arrow/go/v16/arrow"

	"labelweir/connectors/internal/spell"
	"labelweir/connectors/internal/textrows"
	"labelweir/connectors/table"
)

// composer puts lines together; it implements textrows.Composer.
type composer struct {
	names [][]byte // of each column: the name as JSON and a colon
	raw   int      // index of the hidden column, −1 when there is none
}

func create(w io.Writer, schema *arrow.Schema, opt table.WriteOptions) (table.Writer, error) {
	c := &composer{raw: table.RawIndex(schema)}
	for _, name := range uniqueNames(schema) {
		c.names = append(c.names, append(spell.AppendString(nil, name), ':'))
	}
	m, _ := opt.Manner.(manner)
	return textrows.NewWriter(w, c, schema, []byte(m.mark)), nil
}

// uniqueNames gives each column a name that no other has, for members of one object must differ: its own, or with "#2",
// "#3" … when it is taken.
func uniqueNames(schema *arrow.Schema) []string {
	taken := map[string]bool{}
	for _, f := range schema.Fields() {
		taken[f.Name] = true
	}
	names, met := make([]string, schema.NumFields()), map[string]bool{}
	for i, f := range schema.Fields() {
		name := f.Name
		for k := 2; met[name] || k > 2 && taken[name]; k++ {
			name = fmt.Sprintf("%s#%d", f.Name, k)
		}
		if names[i] = name; i != table.RawIndex(schema) {
			met[name] = true
		}
	}
	return names
}

// Speller implements textrows.Composer.
func (c *composer) Speller(_ int, arr arrow.Array) (spell.Speller, error) { return spell.JSON(arr) }

// Head implements textrows.Composer: all before the closing brace.
func (c *composer) Head(kept []byte) int { return bytes.LastIndexByte(kept, '}') }

// AppendRest implements textrows.Composer: the members behind the hidden column and the line's closing brace, or an object
// of all columns.
func (c *composer) AppendRest(dst, kept []byte, head int, spellers []spell.Speller, i int) []byte {
	end, from, empty := []byte("}"), 0, true
	if kept != nil {
		inside := bytes.TrimRight(kept[:head], " \t\r")
		end, from, empty = kept[head:], c.raw+1, inside[len(inside)-1] == '{'
	} else {
		dst = append(dst, '{')
	}
	for k := from; k < len(spellers); k++ {
		if k == c.raw {
			continue
		}
		if !empty {
			dst = append(dst, ',')
		}
		empty = false
		dst, _ = spellers[k](append(dst, c.names[k]...), i)
	}
	return append(append(dst, end...), '\n')
}
