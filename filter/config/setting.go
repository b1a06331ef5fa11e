package config

import (
	"strings"
	"time"

	"labelweir/filter"
)

// prefix begins the name of every environment variable of ours.
const prefix = "LABELWEIR_"

// Setting is one setting as users meet it.
type Setting struct {
	Path  string // in the file: window.records
	Flag  string // of sweep, without dashes; empty: none
	Takes string // what its value is, in capitals; empty: the flag is a switch
	Doc   string // one line
	set   func(c *Config, value string) error
	text  func(c *Config) string
}

// Text writes the setting's value in c the way it can be read back; empty when there is none.
func (s *Setting) Text(c *Config) string { return s.text(c) }

// Variable is the name of the setting's environment variable.
func (s *Setting) Variable() string { return variable(s.Path) }

func variable(path string) string {
	return prefix + strings.ToUpper(strings.ReplaceAll(path, ".", "_"))
}

// setting describes one field of Config by how to find, read and write it.
func setting[T any](path, flag, takes, doc string, at func(*Config) *T, parse func(string) (T, error), format func(T) string) Setting {
	return Setting{
		Path: path, Flag: flag, Takes: takes, Doc: doc,
		set: func(c *Config, value string) error {
			v, err := parse(value)
			if err == nil {
				*at(c) = v
			}
			return err
		},
		text: func(c *Config) string { return format(*at(c)) },
	}
}

// Settings lists all settings in the order of the file.
func Settings() []Setting {
	return []Setting{
		setting("input.file.path", "", "FILE", "files or folders to read, one a line, or -; sweep's arguments say the same",
			func(c *Config) *string { return &c.Input.File }, parseName, formatName),
		setting("input.format", "format", "FORMAT", "of the input: arrow, arrows, parquet, csv or jsonlines",
			func(c *Config) *string { return &c.Input.Format }, parseFormat, formatFormat),
		setting("input.delimiter", "delimiter", "CHARACTER", "between the cells of a CSV row",
			func(c *Config) *byte { return &c.Input.Delimiter }, parseDelimiter, formatDelimiter),
		setting("input.trust", "trust", "", "read the file in the process itself, not in a guarded one",
			func(c *Config) *bool { return &c.Input.Trust }, parseSwitch, formatSwitch),
		setting("input.memory", "memory", "SIZE", "most memory of the guarded process; auto: 2GiB and six times window.bytes",
			func(c *Config) *int64 { return &c.Input.Memory }, parseMemory, formatMemory),
		setting("record.label", "label", "COLUMN", "column of the observed label",
			func(c *Config) *string { return &c.Record.Label }, parseName, formatName),
		setting("record.source", "source", "COLUMN", "column that tells who or what labelled the record",
			func(c *Config) *string { return &c.Record.Source }, parseName, formatName),
		setting("record.time", "time", "COLUMN", "column of the record's time",
			func(c *Config) *string { return &c.Record.Time }, parseName, formatName),
		setting("record.fields", "fields", "NAMES", "columns to learn from, as a,b:category,c; else chosen by their types",
			func(c *Config) *[]filter.Field { return &c.Record.Fields }, parseFields, formatFields),
		setting("window.records", "window", "ROWS", "most rows to train on; the flag also lets the window slide",
			func(c *Config) *int { return &c.Filter.Records }, parseCount(leastRecords), formatCount),
		setting("window.span", "span", "TIME", "oldest row of a sliding window, as 7d or 36h, against the newest",
			func(c *Config) *time.Duration { return &c.Filter.Span }, parseSpan, formatSpan),
		setting("window.bytes", "", "SIZE", "memory the window may take",
			func(c *Config) *int64 { return &c.Filter.Bytes }, parseSize, formatSize),
		setting("window.slide", "", "true|false", "train again and again along the file; otherwise the file is one window",
			func(c *Config) *bool { return &c.Filter.Sliding }, parseSwitch, formatSwitch),
		setting("retrain.every", "retrain", "AMOUNT", "new rows that call for a retrain: a share of the window or a count",
			func(c *Config) *filter.Every { return &c.Filter.Retrain }, parseEvery, formatEvery),
		setting("retrain.seed", "seed", "NUMBER", "seed of every random draw; same seed, same bytes out",
			func(c *Config) *uint64 { return &c.Filter.Seed }, parseSeed, formatSeed),
		setting("retrain.workers", "workers", "COUNT", "goroutines to train and score with; the result is the same",
			func(c *Config) *int { return &c.Filter.Workers }, parseWorkers, formatWorkers),
		setting("filter.mode", "mode", "MODE", "observe: tag every record; divert: also hold near-certain ones back",
			func(c *Config) *filter.Mode { return &c.Filter.Mode }, parseMode, formatMode),
		setting("filter.precision", "precision", "SHARE", "share of truly wrong labels wanted among the held-back records",
			func(c *Config) *float64 { return &c.Filter.Precision }, parsePrecision, formatNumber),
		setting("filter.budget", "budget", "SHARE", "largest share of records that may be held back",
			func(c *Config) *float64 { return &c.Filter.Budget }, parseShare, formatShare),
		setting("filter.hold", "hold", "ROWS", "rows of look-ahead in a sliding window before a row is let on",
			func(c *Config) *int { return &c.Filter.Hold }, parseCount(0), formatCount),
		setting("filter.cooldown", "", "COUNT", "retrains with normal readings before holding back begins again",
			func(c *Config) *int { return &c.Filter.Cooldown }, parseCount(1), formatCount),
		setting("filter.gate", "gate", "SHARE", "estimated share of wrong labels above which the exit code is 3",
			func(c *Config) *float64 { return &c.Gate }, parseGate, formatGate),
		setting("output.format", "out-format", "FORMAT", "of the outputs; auto: by their names, else the input's",
			func(c *Config) *string { return &c.Output.Format }, parseFormat, formatFormat),
		setting("output.file.tagged", "out", "FILE", "file of the records that go on, or - for standard output",
			func(c *Config) *string { return &c.Output.Tagged }, parseName, formatName),
		setting("output.file.quarantine", "quarantine", "FILE", "file of the records held back, with mode divert",
			func(c *Config) *string { return &c.Output.Quarantine }, parseName, formatName),
		setting("output.file.unreadable", "unreadable", "FILE", "JSON lines of the rows that can't be read; else the first is an error",
			func(c *Config) *string { return &c.Output.Unreadable }, parseName, formatName),
		setting("output.file.report", "report", "FILE", "JSON report",
			func(c *Config) *string { return &c.Output.Report }, parseName, formatName),
		setting("output.file.snapshot", "snapshot", "FILE", "last snapshot, for inspect",
			func(c *Config) *string { return &c.Output.Snapshot }, parseName, formatName),
		setting("output.file.replace", "replace", "", "replace output files that exist",
			func(c *Config) *bool { return &c.Output.Replace }, parseSwitch, formatSwitch),
		setting("output.file.resume", "resume", "", "go on where an interrupted sweep stopped, and keep what that takes",
			func(c *Config) *bool { return &c.Output.Resume }, parseSwitch, formatSwitch),
	}
}
