package config

import (
	"flag"
	"os"
	"path/filepath"
	"strings"
	"testing"
)

var update = flag.Bool("update", false, "write what was got into testdata")

// files gives the names of the configuration examples with that ending.
func files(t *testing.T, ending string) []string {
	t.Helper()
	names, err := filepath.Glob("testdata/config/*." + ending)
	if err != nil || len(names) == 0 {
		t.Fatalf("no *.%s files: %v", ending, err)
	}
	return names
}

// split gives the YAML of an example and what should come of it, which stands behind a line "-- mark --".
func split(t *testing.T, name, mark string) (yaml, want string) {
	t.Helper()
	text, err := os.ReadFile(name)
	if err != nil {
		t.Fatal(err)
	}
	yaml, want, ok := strings.Cut(string(text), "-- "+mark+" --\n")
	if !ok {
		t.Fatalf("%s has no line -- %s --", name, mark)
	}
	return yaml, want
}

func compare(t *testing.T, name, mark, yaml, got, want string) {
	t.Helper()
	if got == want {
		return
	}
	if *update {
		if err := os.WriteFile(name, []byte(yaml+"-- "+mark+" --\n"+got), 0o644); err != nil {
			t.Fatal(err)
		}
		return
	}
	t.Errorf("got\n%swant\n%s", got, want)
}

// different lists the settings of c that are not the defaults.
func different(c *Config) string {
	var b strings.Builder
	standard := Default()
	for _, s := range Settings() {
		if text := s.Text(c); text != s.Text(&standard) {
			b.WriteString(s.Path + " = " + text + "\n")
		}
	}
	return b.String()
}

func TestGoodFilesGiveTheirSettings(t *testing.T) {
	for _, name := range files(t, "good") {
		t.Run(filepath.Base(name), func(t *testing.T) {
			yaml, want := split(t, name, "settings")
			l := NewLoader()
			l.File("weir.yaml", []byte(yaml))
			c, err := l.Config()
			if err != nil {
				t.Fatal(err)
			}
			compare(t, name, "settings", yaml, different(c), want)
		})
	}
}

func TestBadFilesGiveTheirFaults(t *testing.T) {
	for _, name := range files(t, "bad") {
		t.Run(filepath.Base(name), func(t *testing.T) {
			yaml, want := split(t, name, "faults")
			l := NewLoader()
			l.File("weir.yaml", []byte(yaml))
			_, err := l.Config()
			if err == nil {
				t.Fatal("no fault found")
			}
			compare(t, name, "faults", yaml, err.Error()+"\n", want)
		})
	}
}
