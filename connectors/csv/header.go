package csv

import (
	"bytes"
	"fmt"
	"slices"
	"strings"
	"unicode/utf8"

	"github.com/apache/arrow/go/v16/arrow"

	"labelweir/connectors/internal/cell"
	"labelweir/connectors/internal/textrows"
	"labelweir/connectors/table"
)

// header is what the first row and those used to infer the types tell about a file.
type header struct {
	manner
	names []string
	types []arrow.DataType // utf8, binary where the first cells are no UTF-8, or a *table.CellType
	end   int64            // where the first row behind it begins
	line  int64            // and its line
}

// readHeader reads the header and, unless like tells all types, looks at the first rows.
func readHeader(f table.File, opt table.ReadOptions) (*header, error) {
	r := newRows(f, opt.Delimiter, opt.MostRow)
	if f.Size > 0 {
		if err := r.More(); err != nil {
			return nil, err
		}
	}
	text := r.Feed.Window()
	if what, do := foreign(text); what != "" {
		return nil, r.Fault(what, do, nil)
	}
	mark := 0
	if bytes.HasPrefix(text, []byte(textrows.ByteOrderMark)) {
		mark = len(textrows.ByteOrderMark)
		r.Feed.Skip(mark)
	}
	if r.delimiter == 0 {
		r.delimiter = sniff(text[mark:], r.Feed.Ended())
	}
	h := &header{manner: manner{delimiter: r.delimiter}}
	if err := h.first(r); err != nil {
		return nil, err
	}
	h.manner.header = append([]byte(textrows.ByteOrderMark)[:mark], h.manner.header...)
	return h, h.infer(r, opt)
}

// first takes the header's row.
func (h *header) first(r *rows) error {
	ok, err := r.Next()
	switch {
	case err != nil:
		return err
	case !ok:
		return r.Fault("has no rows, not even a header", "check the step that wrote it", nil)
	case r.Reason != "":
		return r.Fault("the header can't be read: "+r.Reason, "write the names of the columns into the first row", nil)
	case r.row.Count > mostColumns:
		return r.Fault(fmt.Sprintf("the header has %d cells, more than %d", r.row.Count, mostColumns), "check that "+quoted(r.delimiter)+" is its delimiter", nil)
	}
	for i := range r.row.Cells {
		name := r.cell(i)
		if r.row.Cells[i].Doubled {
			name = undouble(nil, name)
		}
		if !utf8.Valid(name) {
			return r.Fault(fmt.Sprintf("the name of column %d is not UTF-8 text", i+1), "convert the file to UTF-8", nil)
		}
		h.names = append(h.names, string(name))
	}
	h.header = bytes.Clone(r.Row)
	h.newline = "\n"
	if bytes.HasSuffix(r.whole, []byte("\r\n")) {
		h.newline = "\r\n"
	}
	h.end, h.line, r.columns = r.At+int64(r.Skip), r.Beyond, r.row.Count
	return nil
}

// peekBytes bounds the text looked at for the types.
const peekBytes = 64 << 20

// infer sets the types: those of like for the columns that it has, those that the first rows allow for the others.
func (h *header) infer(r *rows, opt table.ReadOptions) error {
	h.types = likes(h.names, opt.Like)
	if !slices.Contains(h.types, nil) {
		return nil
	}
	guesses, err := h.peek(r, opt.Peek)
	if err != nil {
		return err
	}
	for i, g := range guesses {
		if h.types[i] == nil {
			h.types[i] = typeOf(g.Type(), g.foreign)
		}
	}
	return nil
}

// guess is what the first cells of a column can mean, and whether some are no UTF-8.
type guess struct {
	cell.Guess
	foreign bool
}

// peek looks at the first rows that can be read. When there are rows but none of them can be, that is an error: most
// often it has another delimiter.
func (h *header) peek(r *rows, most int) ([]guess, error) {
	guesses := make([]guess, len(h.names))
	var first error
	read := 0
	for read < most && r.Feed.Offset() < h.end+peekBytes {
		ok, err := r.Next()
		if err != nil {
			return nil, err
		}
		if !ok {
			break
		}
		if r.Reason != "" {
			if first == nil {
				first = r.Fault("no row behind the header can be read; this one "+r.Reason, "check that "+quoted(r.delimiter)+" is the delimiter", nil)
			}
			continue
		}
		read++
		for i := range guesses {
			guesses[i].Watch(r.cell(i))
			guesses[i].foreign = guesses[i].foreign || !utf8.Valid(r.cell(i))
		}
	}
	if read == 0 {
		return guesses, first
	}
	return guesses, nil
}

func typeOf(means arrow.DataType, foreign bool) arrow.DataType {
	switch {
	case means != nil:
		return table.NewCellType(means)
	case foreign:
		return arrow.BinaryTypes.Binary
	}
	return arrow.BinaryTypes.String
}

// likes gives for each name the type of the column of that name in like, nil when there is none that CSV can have; the
// k-th column of a repeated name goes with the k-th there.
func likes(names []string, like *arrow.Schema) []arrow.DataType {
	out := make([]arrow.DataType, len(names))
	if like == nil {
		return out
	}
	met := map[string]int{}
	for i, name := range names {
		found := like.FieldIndices(name)
		k := met[name]
		met[name]++
		if k >= len(found) || found[k] == table.RawIndex(like) {
			continue
		}
		switch dt := like.Field(found[k]).Type; dt.(type) {
		case *table.CellType, *arrow.StringType, *arrow.BinaryType:
			out[i] = dt
		}
	}
	return out
}

// schema is the schema of the record batches: the columns and the hidden one.
func (h *header) schema(rawDelimiter byte) *arrow.Schema {
	var fields []arrow.Field
	for i, name := range h.names {
		fields = append(fields, arrow.Field{Name: name, Type: h.types[i], Nullable: true})
	}
	raw := table.RawField(formatName)
	raw.Nullable = true
	raw.Metadata = arrow.NewMetadata(append(raw.Metadata.Keys(), delimiterKey), append(raw.Metadata.Values(), string(rune(rawDelimiter))))
	return arrow.NewSchema(append(fields, raw), nil)
}

// mustBeText tells for each column whether its cells must be UTF-8: whether text names it, perhaps with "#2" and so on
// behind a name that is repeated.
func mustBeText(names, text []string) []bool {
	out := make([]bool, len(names))
	for i, name := range names {
		for _, t := range text {
			out[i] = out[i] || t == name || strings.HasPrefix(t, name+"#")
		}
	}
	return out
}
