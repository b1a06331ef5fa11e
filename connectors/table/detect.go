package table

import (
	"bytes"
	"fmt"
	"io"
	"path/filepath"
	"strings"

	"labelweir/filter"
)

// formatOf finds out the format of an open file: the one asked for, else by its first bytes, else by its name.
func formatOf(f File, name string, opt Options) (*Format, error) {
	if opt.InFormat != "" {
		return named(opt.Formats, opt.InFormat, f.Path, ErrUnreadable)
	}
	head := make([]byte, 64)
	n, err := f.ReadAt(head, 0)
	if err != nil && err != io.EOF {
		return nil, &Error{Path: f.Path, What: "can't be read", Kind: ErrUnreadable, Err: bare(err)}
	}
	for i, format := range opt.Formats {
		for _, magic := range format.Magic {
			if bytes.HasPrefix(head[:n], magic) {
				return &opt.Formats[i], nil
			}
		}
	}
	if found := byEnding(opt.Formats, name); found != nil {
		return found, nil
	}
	return nil, &Error{Path: f.Path, What: "neither its first bytes nor its name tell its format",
		Do: "name the format if it is one of " + formatNames(opt.Formats), Kind: ErrUnreadable}
}

// byEnding is the first format for which the ending of a file's name stands, nil when there is none.
func byEnding(formats []Format, name string) *Format {
	name = strings.ToLower(filepath.Base(name))
	for i, f := range formats {
		if f.hasEnding(name) {
			return &formats[i]
		}
	}
	return nil
}

func (f *Format) hasEnding(name string) bool {
	for _, e := range f.Endings {
		if strings.HasSuffix(strings.ToLower(name), e) {
			return true
		}
	}
	return false
}

// named is the format of a name.
func named(formats []Format, name, path string, kind error) (*Format, error) {
	var names []string
	for i, f := range formats {
		if f.Name == name {
			return &formats[i], nil
		}
		names = append(names, f.Name)
	}
	e := &Error{Path: path, What: fmt.Sprintf("there is no format %q", name), Do: "name one of " + formatNames(formats), Kind: kind}
	if near := filter.Nearest(name, names); near != "" {
		e.Do = fmt.Sprintf("did you mean %s?", near)
	}
	return nil, e
}

// formatNames lists the formats: "arrow, csv".
func formatNames(formats []Format) string {
	var names []string
	for _, f := range formats {
		names = append(names, f.Name)
	}
	return strings.Join(names, ", ")
}

// outFormat is the format of an output: the one asked for; else that of the input, when the name does not mean another.
func outFormat(path string, input *Format, opt Options) (*Format, error) {
	if opt.OutFormat != "" {
		return named(opt.Formats, opt.OutFormat, path, ErrTarget)
	}
	if !input.hasEnding(path) {
		if found := byEnding(opt.Formats, path); found != nil {
			return found, nil
		}
	}
	return input, nil
}
