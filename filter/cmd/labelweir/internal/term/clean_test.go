package term

import (
	"strings"
	"testing"
)

func TestNothingCommandsTheTerminal(t *testing.T) {
	for in, want := range map[string]string{
		"Größe\t½ ✓\n":             "Größe\t½ ✓\n",
		"\x1b]0;owned\x07red":      "\ufffd]0;owned\ufffdred",
		"over\rwritten":            "over\ufffdwritten",
		"\u009b31m":                "\ufffd31m",
		"no \xff text":             "no \ufffd text",
		"abc\u202edcba":            "abc\ufffddcba",
		"two\u2028lines\u2029here": "two\ufffdlines\ufffdhere",
		"":                         "",
	} {
		var whole strings.Builder
		if _, err := Clean(&whole).Write([]byte(in)); err != nil || whole.String() != want {
			t.Errorf("%q became %q, %v; want %q", in, whole.String(), err, want)
		}
		var bytewise strings.Builder
		w := Clean(&bytewise)
		for i := range len(in) {
			if n, err := w.Write([]byte{in[i]}); n != 1 || err != nil {
				t.Fatalf("wrote %d, %v", n, err)
			}
		}
		if bytewise.String() != want {
			t.Errorf("byte by byte, %q became %q, want %q", in, bytewise.String(), want)
		}
	}
}
