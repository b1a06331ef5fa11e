package table

import (
	"fmt"
	"slices"
	"strings"

	"github.com/apache/arrow/go/v16/arrow"

	"labelweir/filter"
	"labelweir/model"
)

// plan says which column of the input is what, checked against the schema.
type plan struct {
	label, source, time int // column indexes; −1: none
	features            []feature
}

type feature struct {
	index int
	filter.Field
}

// planner turns a record into a plan, or an error that says which name is wrong.
type planner struct {
	in     *input
	path   string
	schema *arrow.Schema
	names  []string // see uniqueNames
}

// parts finds the columns of label, source and time.
func (p *planner) parts(rec filter.Record) (pl plan, err error) {
	if rec.Label == "" {
		return pl, &Error{Path: p.path, What: "no label column is named", Do: "name one of: " + p.list(), Kind: ErrColumn}
	}
	if pl.label, err = p.one("label", rec.Label); err != nil {
		return pl, err
	}
	if pl.source, err = p.one("source", rec.Source); err != nil {
		return pl, err
	}
	if pl.time, err = p.one("time", rec.Time); err != nil {
		return pl, err
	}
	if pl.source == pl.label {
		return pl, &Error{Path: p.path, Column: rec.Label, What: "is both the label and the source", Do: "name another column for the source or none", Kind: ErrColumn}
	}
	if err = p.nameable("label", pl.label); err == nil {
		err = p.nameable("source", pl.source)
	}
	if err == nil {
		err = p.timed(pl.time)
	}
	return pl, err
}

// one finds the only column of a name; −1 when no name is given.
func (p *planner) one(part, name string) (int, error) {
	if name == "" {
		return -1, nil
	}
	found := p.schema.FieldIndices(name)
	switch len(found) {
	case 1:
		return found[0], nil
	case 0:
		return -1, p.unknown(part, name)
	}
	return -1, &Error{Path: p.path, Column: name, What: fmt.Sprintf("%d columns have this name, so the %s is ambiguous", len(found), part),
		Do: "rename all but one of them", Kind: ErrColumn}
}

func (p *planner) unknown(part, name string) error {
	e := &Error{Path: p.path, What: fmt.Sprintf("there is no column %q for the %s", name, part), Kind: ErrColumn}
	if near := filter.Nearest(name, p.names); near != "" {
		e.Do = fmt.Sprintf("the nearest name is %q; all columns: %s", near, p.list())
	} else {
		e.Do = "the columns are: " + p.list()
	}
	return e
}

// nameable refuses types that can't name a class or a source.
func (p *planner) nameable(part string, i int) error {
	if i < 0 || isName(plain(p.schema.Field(i).Type)) {
		return nil
	}
	return &Error{Path: p.path, Column: p.names[i], What: fmt.Sprintf("values of type %s can't be the %s", p.schema.Field(i).Type, part),
		Do: "use text, integers, booleans or a dictionary of these", Kind: ErrColumn}
}

// timed refuses types that don't say which moment a value means.
func (p *planner) timed(i int) error {
	if i < 0 || isTime(meant(p.schema.Field(i).Type)) {
		return nil
	}
	dt := p.schema.Field(i).Type
	e := &Error{Path: p.path, Column: p.names[i], What: fmt.Sprintf("values of type %s can't be the time", dt),
		Do: "use a timestamp or a date", Kind: ErrColumn}
	if arrow.IsInteger(meant(dt).ID()) {
		e.What = fmt.Sprintf("values of type %s don't tell their unit, so they can't be the time", dt)
		e.Do = `cast it to a timestamp first (pyarrow: column.cast(pyarrow.timestamp("s")) when it counts seconds)`
	}
	return e
}

// features checks the fields that a record names.
func (p *planner) features(rec filter.Record, pl *plan) error {
	met := map[int]bool{}
	for _, f := range rec.Fields {
		i := indexOf(p.names, f.Path)
		if i < 0 {
			return p.unknown("field", f.Path)
		}
		switch {
		case met[i]:
			return &Error{Path: p.path, Column: f.Path, What: "is named twice among the fields", Do: "name it once", Kind: ErrColumn}
		case i == pl.label:
			return &Error{Path: p.path, Column: f.Path, What: "is the label and can't be a field too", Do: "leave it out of the fields", Kind: ErrColumn}
		}
		met[i] = true
		ft, err := p.feature(i, f)
		if err != nil {
			return err
		}
		pl.features = append(pl.features, ft)
	}
	return nil
}

// feature checks one field against its column; kind and size are filled in when they are not given.
func (p *planner) feature(i int, f filter.Field) (feature, error) {
	dt := meant(p.schema.Field(i).Type)
	usual, why := kindOf(dt)
	if f.Kind == 0 {
		f.Kind = usual
	}
	value := dt
	if d, ok := dt.(*arrow.DictionaryType); ok {
		value = plain(d.ValueType)
	}
	ok := false
	switch f.Kind {
	case model.Number:
		ok, f.Size = isNumber(value), 1
	case model.Category:
		ok, f.Size = isName(dt), 1
	case model.Vector:
		var n int
		if list, is := dt.(*arrow.FixedSizeListType); is && usual == model.Vector {
			ok, n = true, int(list.Len())
		}
		if ok && f.Size != 0 && f.Size != n {
			return feature{}, &Error{Path: p.path, Column: f.Path, What: fmt.Sprintf("holds vectors of %d numbers, not of %d", n, f.Size),
				Do: "correct the field's size", Kind: ErrColumn}
		}
		f.Size = n
	}
	if ok {
		return feature{i, f}, nil
	}
	e := &Error{Path: p.path, Column: f.Path, What: fmt.Sprintf("values of type %s can't be read as %s", dt, f.Kind), Kind: ErrColumn}
	switch {
	case f.Kind == 0:
		e.What, e.Do = fmt.Sprintf("values of type %s can't be a field: %s", dt, why), "leave it out of the fields"
	case usual != 0:
		e.Do = fmt.Sprintf("name it as a %s or convert it", usual)
	default:
		e.Do = "leave it out of the fields or convert it"
	}
	return feature{}, e
}

// list names the columns, at most 30.
func (p *planner) list() string {
	names := p.names
	if raw := RawIndex(p.schema); raw >= 0 {
		names = slices.Delete(slices.Clone(names), raw, raw+1)
	}
	if len(names) == 0 {
		return "(none)"
	}
	const most = 30
	if len(names) <= most {
		return strings.Join(names, ", ")
	}
	return fmt.Sprintf("%s and %d more", strings.Join(names[:most], ", "), len(names)-most)
}

func indexOf(names []string, name string) int {
	for i, n := range names {
		if n == name {
			return i
		}
	}
	return -1
}
