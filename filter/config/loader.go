package config

import (
	"slices"
	"strings"

	"labelweir/filter"
)

// Loader lays layers of settings over the defaults and collects everything wrong with them. The calls may come in any
// order; Config puts flag over environment over file over default.
type Loader struct {
	faults Faults
	values map[string]value // by path; the one from the highest layer so far
	file   string           // name of the file read; empty: none
}

// value is a setting's value as it was written, and where.
type value struct {
	layer  Layer
	where  string
	line   int
	column int
	text   string
	fields []filter.Field // record.fields of a file, which is no text
}

// NewLoader returns a loader that knows only the defaults.
func NewLoader() *Loader { return &Loader{values: make(map[string]value)} }

// Flag takes the value of a flag of the setting at path, which must be one of [Settings]; written is the flag as the
// user wrote it.
func (l *Loader) Flag(written, path, text string) {
	l.put(path, value{layer: FromFlag, where: written, text: text})
}

// Environment takes the settings among environ, which has the form of os.Environ. A variable that begins with
// LABELWEIR_ and one of the sections' names, or is close to a known one, but is none, is a fault; other variables are
// left alone, since schedulers put names of their own there (LABELWEIR_SERVICE_HOST).
func (l *Loader) Environment(environ []string) {
	known := make(map[string]string)
	sections := make(map[string]bool)
	for _, s := range Settings() {
		known[s.Variable()] = s.Path
		section, _, _ := strings.Cut(s.Path, ".")
		sections[section] = true
	}
	for _, entry := range slices.Sorted(slices.Values(environ)) {
		name, text, _ := strings.Cut(entry, "=")
		word, ours := strings.CutPrefix(name, prefix)
		if !ours {
			continue
		}
		if path, ok := known[name]; ok {
			l.put(path, value{layer: FromEnvironment, where: name, text: text})
			continue
		}
		path := strings.ToLower(strings.ReplaceAll(word, "_", "."))
		section, _, _ := strings.Cut(path, ".")
		if meant := meantBy(path); meant != "" {
			l.fault(FromEnvironment, name, "", "unknown setting; did you mean "+variable(meant)+"?")
		} else if sections[section] {
			l.fault(FromEnvironment, name, "", "unknown setting; unset it")
		}
	}
}

// Config gives the settings, or all [Faults] of the layers. What it gives is well formed; whether a command can work
// with it is for [Config.Check] to say.
func (l *Loader) Config() (*Config, error) {
	c := Default()
	faults := slices.Clone(l.faults)
	for _, s := range Settings() {
		v, ok := l.values[s.Path]
		if !ok {
			continue
		}
		if v.fields != nil {
			c.Record.Fields = v.fields
		} else if err := s.set(&c, v.text); err != nil {
			f := &Fault{Layer: v.layer, Where: v.where, What: err.Error(), Line: v.line, Column: v.column}
			if v.layer == FromFile {
				f.Path = s.Path
			}
			faults = append(faults, f)
		}
	}
	if l.values["window.records"].layer == FromFlag || c.Filter.Span > 0 {
		c.Filter.Sliding = true
	}
	if len(faults) > 0 {
		slices.SortStableFunc(faults, func(a, b *Fault) int {
			if a.Layer != b.Layer {
				return int(a.Layer) - int(b.Layer)
			}
			if a.Line != b.Line {
				return a.Line - b.Line
			}
			return a.Column - b.Column
		})
		return nil, faults
	}
	return &c, nil
}

func (l *Loader) put(path string, v value) {
	if v.layer >= l.values[path].layer {
		l.values[path] = v
	}
}

func (l *Loader) fault(layer Layer, where, path, what string) {
	l.faults = append(l.faults, &Fault{Layer: layer, Where: where, Path: path, What: what})
}
