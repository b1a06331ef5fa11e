package config

import (
	"fmt"
	"os"
	"strings"
	"testing"
)

// readmeTable is the README's table of settings as it should be.
func readmeTable() string {
	var b strings.Builder
	standard := Default()
	b.WriteString("| setting | flag | default | says |\n| --- | --- | --- | --- |\n")
	for _, s := range Settings() {
		flag := ""
		if s.Flag != "" {
			flag = "`--" + s.Flag + "`"
		}
		text := s.Text(&standard)
		if text != "" {
			text = "`" + text + "`"
		}
		fmt.Fprintf(&b, "| `%s` | %s | %s | %s |\n", s.Path, flag, text, s.Doc)
	}
	return b.String()
}

func TestTheReadmeListsEverySettingWithItsDefault(t *testing.T) {
	const name, begins = "../../README.md", "| setting | flag |"
	text, err := os.ReadFile(name)
	if err != nil {
		t.Fatal(err)
	}
	before, rest, ok := strings.Cut(string(text), begins)
	if !ok {
		t.Fatalf("the README has no table that begins with %s", begins)
	}
	end := strings.Index(rest, "\n\n") + 1
	got, want := begins+rest[:end], readmeTable()
	if got == want {
		return
	}
	if *update {
		if err := os.WriteFile(name, []byte(before+want+rest[end:]), 0o644); err != nil {
			t.Fatal(err)
		}
		return
	}
	t.Errorf("the README's table is\n%s\nand should be\n%s", got, want)
}
