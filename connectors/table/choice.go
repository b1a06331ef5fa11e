package table

import (
	"fmt"
	"strings"
	"unicode"

	"github.com/apache/arrow/go/v16/arrow"

	"labelweir/filter"
	"labelweir/model"
)

// Choice tells what became of one column of the input.
type Choice struct {
	Column string     // its name here; a repeated name gets "#2", "#3" … from its second column on
	Type   string     // its Arrow type
	Used   bool       // as a feature
	Kind   model.Kind // when used
	Why    string     // one reason, in words; may stand beside a used column too
}

// When a column's first rows count as identifying. A code list of 20 rows says nothing, hence the least counts.
const (
	idShare   = 0.95 // distinct values of a column with an id-like name
	textShare = 0.9  // distinct values of text that can't be a list of levels
	leastRows = 20   // values needed to call a column identifying
)

// uniqueNames gives each column a name that no other has: its own, or with "#2", "#3" … when it is taken.
func uniqueNames(schema *arrow.Schema) []string {
	taken := map[string]bool{}
	for _, f := range schema.Fields() {
		taken[f.Name] = true
	}
	names, met := make([]string, schema.NumFields()), map[string]bool{}
	for i, f := range schema.Fields() {
		name := f.Name
		for k := 2; met[name] || (k > 2 && taken[name]); k++ {
			name = fmt.Sprintf("%s#%d", f.Name, k)
		}
		names[i], met[name] = name, true
	}
	return names
}

// infer decides for every column that has no other part whether it is a feature.
func infer(names []string, schema *arrow.Schema, parts map[int]string, habits []habit) []Choice {
	out := make([]Choice, len(names))
	for i, f := range schema.Fields() {
		c := Choice{Column: names[i], Type: f.Type.String()}
		if part, ok := parts[i]; ok {
			c.Why = part
		} else {
			c.Kind, c.Why = judge(f, habits[i])
			c.Used = c.Kind != 0
			if c.Used && names[i] != f.Name {
				c.Why = strings.TrimPrefix(c.Why+", name repeated", ", ")
			}
		}
		out[i] = c
	}
	return out
}

// judge gives a feature's kind, or 0 and the reason for leaving the column out. A used column may have a remark.
func judge(f arrow.Field, h habit) (model.Kind, string) {
	kind, why := kindOf(meant(f.Type))
	if kind == 0 {
		return 0, why
	}
	switch {
	case f.Metadata.FindKey(RawKey) >= 0:
		return 0, "the bytes of the row"
	case IsTag(f.Name):
		return 0, "a tag of an earlier run"
	case h.rows > 0 && h.valid == 0:
		return kind, "all values missing in the first rows"
	case h.counting && h.rows >= leastRows:
		return 0, "counts the rows"
	case idLike(f.Name) && h.allDistinct(idShare, leastRows):
		return 0, "named like an identifier and nearly every value is different"
	case kind == model.Category && !h.text:
		return 0, "bytes that are not text"
	case kind == model.Category && h.allDistinct(textShare, leastRows):
		return 0, "free text: nearly every value is different"
	}
	return kind, ""
}

// kindOf is the kind that a type is read as when nothing else is asked for, or 0 and why it is not.
func kindOf(dt arrow.DataType) (model.Kind, string) {
	switch dt := dt.(type) {
	case *arrow.DictionaryType:
		switch v := plain(dt.ValueType); {
		case isNumber(v) && !isName(v), arrow.IsFloating(v.ID()):
			return model.Number, ""
		case isName(v):
			return model.Category, ""
		}
	case *arrow.FixedSizeListType:
		if isNumber(plain(dt.Elem())) && dt.Len() > 0 {
			return model.Vector, ""
		}
	case *arrow.NullType:
		return 0, "its type has no values"
	case *arrow.Time32Type, *arrow.Time64Type:
		return 0, "a time of day"
	}
	switch {
	case isNumber(dt):
		return model.Number, ""
	case isText(dt):
		return model.Category, ""
	case isTime(dt):
		return 0, "a date or time"
	}
	return 0, "type not supported as a feature"
}

// idLike tells whether a name's last word, or its only first word, is one used for identifiers.
func idLike(name string) bool {
	w := words(name)
	if len(w) == 0 {
		return false
	}
	switch w[len(w)-1] {
	case "id", "ids", "idx", "index", "uuid", "guid", "key", "pk", "rowid", "serial", "number", "no", "nr":
		return true
	}
	return w[0] == "id" || w[0] == "uuid"
}

// words cuts a name at everything but letters and digits, and where a small letter is followed by a capital.
func words(name string) []string {
	var b strings.Builder
	last := rune(0)
	for _, r := range name {
		switch {
		case !unicode.IsLetter(r) && !unicode.IsDigit(r):
			b.WriteByte(' ')
		case unicode.IsUpper(r) && unicode.IsLower(last):
			b.WriteByte(' ')
			b.WriteRune(r)
		default:
			b.WriteRune(r)
		}
		last = r
	}
	return strings.Fields(strings.ToLower(b.String()))
}

// explicit is the record with the fields of a choice written out.
func explicit(rec filter.Record, choice []Choice, schema *arrow.Schema) filter.Record {
	rec.Fields = nil
	for i, c := range choice {
		if !c.Used {
			continue
		}
		f := filter.Field{Path: c.Column, Kind: c.Kind}
		if c.Kind == model.Vector {
			f.Size = int(plain(schema.Field(i).Type).(*arrow.FixedSizeListType).Len())
		}
		rec.Fields = append(rec.Fields, f)
	}
	return rec
}
