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
	File string // input.file.path; empty: not a file
}

// Output names the files to write; an empty name is a file not wanted.
type Output struct {
	Tagged     string // output.file.tagged
	Quarantine string // output.file.quarantine; only with mode divert
	Report     string // output.file.report
	Snapshot   string // output.file.snapshot
	Replace    bool   // output.file.replace: whether files that exist may be replaced; default false
}

// Default gives every setting its default.
func Default() Config { return Config{Filter: filter.Default()} }
