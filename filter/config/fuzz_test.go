package config

import (
	"os"
	"path/filepath"
	"strings"
	"testing"
)

// FuzzFile holds that no text makes the loader panic, that every fault of a file says where, and that settings that
// were read can be written and read back.
func FuzzFile(f *testing.F) {
	for _, pattern := range []string{"testdata/config/*.good", "testdata/config/*.bad"} {
		names, err := filepath.Glob(pattern)
		if err != nil {
			f.Fatal(err)
		}
		for _, name := range names {
			text, err := os.ReadFile(name)
			if err != nil {
				f.Fatal(err)
			}
			yaml, _, _ := strings.Cut(string(text), "-- ")
			f.Add(yaml)
		}
	}
	f.Fuzz(func(t *testing.T, text string) {
		l := NewLoader()
		l.File("weir.yaml", []byte(text))
		c, err := l.Config()
		if err != nil {
			for line := range strings.Lines(err.Error()) {
				if !strings.HasPrefix(line, "weir.yaml:") {
					t.Errorf("fault without a place: %s", line)
				}
			}
			return
		}
		again := NewLoader()
		for _, s := range Settings() {
			// A list of fields with commas or colons in their names has no one-line form.
			if value := s.Text(c); value != "" && s.Path != "record.fields" {
				again.Flag("--"+s.Flag, s.Path, value)
			}
		}
		back, err := again.Config()
		if err != nil {
			t.Fatalf("%v after reading %q", err, text)
		}
		for _, s := range Settings() {
			if s.Path != "record.fields" && s.Path != "window.slide" && s.Text(back) != s.Text(c) {
				t.Errorf("%s: %q came back as %q", s.Path, s.Text(c), s.Text(back))
			}
		}
	})
}
