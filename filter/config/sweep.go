package config

import (
	"fmt"
	"path/filepath"
	"slices"

	"labelweir/filter"
)

// Sweep gives the settings for a sweep over a file, or all [Faults]: what no sweep can do without, and what does not
// go together.
func (l *Loader) Sweep() (*Config, error) {
	c, err := l.Config()
	if err != nil {
		return nil, err
	}
	k := checker{l: l}
	k.required("input.file.path", "", c.Input.File, "no file to read; name one, as in labelweir sweep grading.arrow")
	k.required("record.label", "label", c.Record.Label, "not given; name the column of the labels")
	k.required("output.file.tagged", "out", c.Output.Tagged, "not given; name the file to write")
	k.columns(c)
	k.window(c)
	switch divert := c.Filter.Mode == filter.Divert; {
	case divert && c.Output.Quarantine == "":
		k.add("filter.mode", "mode divert wants a file for what is held back; give --quarantine FILE")
	case !divert && c.Output.Quarantine != "":
		k.add("output.file.quarantine", "nothing is held back in mode observe; give --mode divert, or leave it out")
	}
	k.files(c)
	k.pipes(c)
	if len(k.faults) > 0 {
		return nil, k.faults
	}
	return c, nil
}

// checker collects faults between settings.
type checker struct {
	l      *Loader
	faults Faults
}

// add reports a fault where the setting was written.
func (k *checker) add(path, what string) {
	v := k.l.values[path]
	f := &Fault{Layer: v.layer, Where: v.where, What: what, Line: v.line, Column: v.column}
	if v.layer == FromFile {
		f.Path = path
	}
	if v.layer == FromDefault {
		f.Where = path
	}
	k.faults = append(k.faults, f)
}

// required reports a setting that has no value. With a settings file the fault is the file's, otherwise the command
// line's.
func (k *checker) required(path, flag, text, what string) {
	switch {
	case text != "":
	case k.l.file != "":
		k.faults = append(k.faults, &Fault{Layer: FromFile, Where: k.l.file, Path: path, What: what})
	case flag == "":
		k.faults = append(k.faults, &Fault{Layer: FromFlag, Where: "sweep", What: what})
	default:
		k.faults = append(k.faults, &Fault{Layer: FromFlag, Where: "--" + flag, What: what})
	}
}

// columns checks that no column has two parts to play.
func (k *checker) columns(c *Config) {
	part := map[string]string{c.Record.Label: "label"}
	for _, p := range []struct{ path, name, part string }{
		{"record.source", c.Record.Source, "source"},
		{"record.time", c.Record.Time, "time"},
	} {
		if p.name == "" {
			continue
		}
		if other := part[p.name]; other != "" {
			k.add(p.path, fmt.Sprintf("%q is the %s already; name another column", p.name, other))
		}
		part[p.name] = p.part
	}
	for _, f := range c.Record.Fields {
		if other := part[f.Path]; other != "" {
			k.add("record.fields", fmt.Sprintf("%q is the %s already; leave it out here", f.Path, other))
		}
		part[f.Path] = "name of another field"
	}
}

// window checks what only a sliding window can do.
func (k *checker) window(c *Config) {
	if c.Filter.Hold > 0 && !c.Filter.Sliding {
		k.add("filter.hold", "only a sliding window has look-ahead; give --window ROWS or --span TIME, or leave it out")
	}
	if c.Filter.Span > 0 && c.Record.Time == "" {
		k.add("window.span", "wants the records' times; give --time COLUMN")
	}
}

// pipes checks that what goes through a pipe goes alone.
func (k *checker) pipes(c *Config) {
	if names := c.Input.Files(); len(names) > 1 && slices.Contains(names, Pipe) {
		k.add("input.file.path", "standard input can't be read together with files; name one or the other")
	}
	switch {
	case !c.Output.Resume:
	case slices.Contains(c.Input.Files(), Pipe):
		k.add("output.file.resume", "standard input can't be read again from its beginning; name a file to read, or leave it out")
	case c.Output.Tagged == Pipe:
		k.add("output.file.resume", "standard output can't be written again from its beginning; name a file for --out, or leave it out")
	}
	for _, f := range []struct{ path, name string }{
		{"output.file.quarantine", c.Output.Quarantine}, {"output.file.unreadable", c.Output.Unreadable},
		{"output.file.report", c.Output.Report}, {"output.file.snapshot", c.Output.Snapshot},
	} {
		if f.name == Pipe {
			k.add(f.path, "only the tagged records can go to standard output; name a file")
		}
	}
}

// files checks that no two files are one.
func (k *checker) files(c *Config) {
	taken := make(map[string]string)
	for _, name := range c.Input.Files() {
		taken[filepath.Clean(name)] = "the input"
	}
	for _, f := range []struct{ path, name, part string }{
		{"output.file.tagged", c.Output.Tagged, "the tagged output"},
		{"output.file.quarantine", c.Output.Quarantine, "the quarantine output"},
		{"output.file.unreadable", c.Output.Unreadable, "for rows that can't be read"},
		{"output.file.report", c.Output.Report, "the report"},
		{"output.file.snapshot", c.Output.Snapshot, "the snapshot"},
	} {
		if f.name == "" || f.name == Pipe {
			continue
		}
		name := filepath.Clean(f.name)
		if other := taken[name]; other != "" {
			k.add(f.path, fmt.Sprintf("%s is %s already; write to another file", f.name, other))
		}
		taken[name] = f.part
	}
}
