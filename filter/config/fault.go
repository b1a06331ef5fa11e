package config

import (
	"fmt"
	"strconv"
	"strings"
	"unicode"
)

// Layer says where a value came from.
type Layer uint8

// The layers, each winning over those before it.
const (
	FromDefault Layer = iota
	FromFile
	FromEnvironment
	FromFlag
)

// Fault is one thing wrong with the settings.
type Fault struct {
	Layer  Layer
	Where  string // file:line:column, environment variable, or flag as written; for a missing value, where it belongs
	Path   string // of the setting; empty when Where says enough
	What   string // what is wrong and what to do
	Line   int    // from 1, with FromFile
	Column int    // from 1, with FromFile
}

// Error says where, what, and what to do, on one line whatever stood in the names.
func (f *Fault) Error() string {
	text := f.Where + ": " + f.What
	if f.Path != "" {
		text = fmt.Sprintf("%s: %s: %s", f.Where, f.Path, f.What)
	}
	if !strings.ContainsFunc(text, unicode.IsControl) {
		return text
	}
	var b strings.Builder
	for _, r := range text {
		if unicode.IsControl(r) {
			b.WriteString(strings.Trim(strconv.QuoteRune(r), "'"))
		} else {
			b.WriteRune(r)
		}
	}
	return b.String()
}

// Faults is everything wrong with the settings, in the order of the layers and of the file.
type Faults []*Fault

// Error gives one fault a line.
func (fs Faults) Error() string {
	lines := make([]string, len(fs))
	for i, f := range fs {
		lines[i] = f.Error()
	}
	return strings.Join(lines, "\n")
}
