package config

import (
	"fmt"
	"strings"

	"labelweir/filter"
)

// Config is all settings of this version. Default fills it; a [Loader] lays file, environment and flags over it.
type Config struct {
	Input  Input
	Record filter.Record // record.*; default: nothing named
	Filter filter.Config // window.*, retrain.* and filter.*; defaults are filter.Default
	Gate   float64       // filter.gate: share of wrong labels above which the command ends with code 3; default 0: none
	Output Output
}

// Input says where records come from.
type Input struct {
	File      string // input.file.path: files and folders, one a line, "-" for standard input; empty: not a file
	Format    string // input.format: one of Formats; default "": told by the first bytes, else by the name
	Delimiter byte   // input.delimiter of CSV; default 0: found out
	Trust     bool   // input.trust: read in the process itself, not in a guarded one; default false
	Memory    int64  // input.memory: bytes the guarded process may take; default 0: MemoryLimit says how many
}

// Files lists the files and folders to read.
func (i Input) Files() []string {
	var names []string
	for name := range strings.Lines(i.File) {
		if name = strings.TrimSuffix(name, "\n"); name != "" {
			names = append(names, name)
		}
	}
	return names
}

// Title is what messages call the input.
func (i Input) Title() string {
	switch names := i.Files(); {
	case i.File == Pipe:
		return "standard input"
	case len(names) > 1:
		return fmt.Sprintf("%s and %d more", names[0], len(names)-1)
	}
	return i.File
}

// Pipe is the name of standard input and standard output.
const Pipe = "-"

// Output names the files to write; an empty name is a file not wanted.
type Output struct {
	Format     string // output.format: one of Formats; default "": told by the file's name, else the input's
	Tagged     string // output.file.tagged; "-" is standard output
	Quarantine string // output.file.quarantine; only with mode divert
	Unreadable string // output.file.unreadable: rows that can't be read; empty: such a row is an error
	Report     string // output.file.report
	Snapshot   string // output.file.snapshot
	Replace    bool   // output.file.replace: whether files that exist may be replaced; default false
	Resume     bool   // output.file.resume: whether a journal is kept, and one that is there is gone on with; default false
}

// MemoryLimit is how many bytes more than at its start the guarded process may take: as set, else room for what is not
// the window's, and for the window, its copies in training, and as much again that waits for the collector.
func (c *Config) MemoryLimit() int64 {
	const base, copies = 2 << 30, 6
	if c.Input.Memory > 0 {
		return c.Input.Memory
	}
	return base + copies*min(c.Filter.Bytes, 1<<50)
}

// Files lists the outputs wanted, in the order in which they get their names: the tagged file last, for with it the
// sweep seems complete.
func (o Output) Files() []string {
	var names []string
	for _, name := range []string{o.Snapshot, o.Report, o.Unreadable, o.Quarantine, o.Tagged} {
		if name != "" && name != Pipe {
			names = append(names, name)
		}
	}
	return names
}

// Default gives every setting its default.
func Default() Config { return Config{Filter: filter.Default()} }
