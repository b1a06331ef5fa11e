package config

import (
	"fmt"
	"strings"

	"labelweir/filter"
)

// Formats are the names of the file formats.
func Formats() []string { return []string{"arrow", "arrows", "parquet", "csv", "jsonlines"} }

// parseFormat reads the name of a format or auto, which is "".
func parseFormat(s string) (string, error) {
	if s == auto {
		return "", nil
	}
	for _, name := range Formats() {
		if s == name {
			return s, nil
		}
	}
	if near := filter.Nearest(s, Formats()); near != "" {
		return "", fmt.Errorf("%q is not a format; did you mean %s?", s, near)
	}
	return "", fmt.Errorf("%q is not a format; write %s, or auto", s, strings.Join(Formats(), ", "))
}

func formatFormat(name string) string {
	if name == "" {
		return auto
	}
	return name
}

// tab is written for the delimiter that can't be seen.
const tab = "tab"

// parseDelimiter reads one character, tab, or auto, which is 0.
func parseDelimiter(s string) (byte, error) {
	switch {
	case s == auto:
		return 0, nil
	case s == tab:
		return '\t', nil
	case len(s) == 1 && s[0] > ' ' && s[0] < 0x7F && s[0] != '"':
		return s[0], nil
	}
	return 0, fmt.Errorf("%q can't stand between cells; write one character such as ; or tab, or auto", s)
}

func formatDelimiter(c byte) string {
	switch c {
	case 0:
		return auto
	case '\t':
		return tab
	}
	return string(rune(c))
}
