package config

import "labelweir/filter"

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
	File   string // input.file.path; empty: not a file
	Trust  bool   // input.trust: read in the process itself, not in a guarded one; default false
	Memory int64  // input.memory: bytes the guarded process may take; default 0: MemoryLimit says how many
}

// Output names the files to write; an empty name is a file not wanted.
type Output struct {
	Tagged     string // output.file.tagged
	Quarantine string // output.file.quarantine; only with mode divert
	Report     string // output.file.report
	Snapshot   string // output.file.snapshot
	Replace    bool   // output.file.replace: whether files that exist may be replaced; default false
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
	for _, name := range []string{o.Snapshot, o.Report, o.Quarantine, o.Tagged} {
		if name != "" {
			names = append(names, name)
		}
	}
	return names
}

// Default gives every setting its default.
func Default() Config { return Config{Filter: filter.Default()} }
