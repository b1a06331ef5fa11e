package config

import (
	"fmt"
	"strings"

	"labelweir/filter"
	"labelweir/model"
)

// kinds are the names of the kinds of field.
func kinds() []string {
	return []string{model.Number.String(), model.Category.String(), model.Vector.String()}
}

func parseKind(s string) (model.Kind, error) {
	for k := model.Number; k <= model.Vector; k++ {
		if s == k.String() {
			return k, nil
		}
	}
	return 0, fmt.Errorf("%q is not a kind of field; write number, category or vector", s)
}

// parseFields reads names with commas between them, each with :KIND behind it if the column's type is not to decide.
func parseFields(s string) ([]filter.Field, error) {
	var fields []filter.Field
	for part := range strings.SplitSeq(s, ",") {
		f := filter.Field{Path: strings.TrimSpace(part)}
		if at := strings.LastIndexByte(f.Path, ':'); at >= 0 {
			word := f.Path[at+1:]
			kind, err := parseKind(word)
			if near := filter.Nearest(word, kinds()); err != nil && near != "" {
				return nil, fmt.Errorf("%q is not a kind of field; did you mean %s?", word, near)
			}
			if err == nil { // else the colon belongs to the name
				f.Path, f.Kind = f.Path[:at], kind
			}
		}
		if f.Path == "" {
			return nil, fmt.Errorf("a name is empty; write it like diameter_mm,cultivar:category")
		}
		fields = append(fields, f)
	}
	return fields, nil
}

func formatFields(fields []filter.Field) string {
	parts := make([]string, len(fields))
	for i, f := range fields {
		parts[i] = f.Path
		if f.Kind != 0 {
			parts[i] += ":" + f.Kind.String()
		}
	}
	return strings.Join(parts, ",")
}
