// Package complete writes what a shell needs to complete a command line of this program: commands, flags, the words a flag
// takes, and file names where a file is meant. All of it comes from the tables that help is made of.
package complete

import (
	"io"
	"strings"

	"labelweir/filter/cmd/labelweir/internal/argv"
)

// Command is one command as a shell sees it.
type Command struct {
	Name  string
	Brief string   // one line
	Words []string // what its operands can be; nil: files
	Flags []argv.Flag
}

// Program is what there is to complete.
type Program struct {
	Name     string
	Commands []Command
	Values   map[string][]string // the words that a flag takes, by what argv.Flag.Takes says
}

// Shells lists the shells that Script knows.
func Shells() []string { return []string{"bash", "zsh", "fish"} }

// Script writes the script for a shell, which must be one of Shells; the same program gives the same bytes.
func Script(w io.Writer, shell string, p Program) error {
	var b strings.Builder
	switch shell {
	case "bash":
		p.bash(&b)
	case "zsh":
		p.zsh(&b)
	case "fish":
		p.fish(&b)
	default:
		panic("complete: no such shell: " + shell)
	}
	_, err := io.WriteString(w, b.String())
	return err
}

// takesFile tells whether a flag's value is the name of a file or folder.
func takesFile(f argv.Flag) bool { return f.Takes == "FILE" || f.Takes == "DIR" }

// written lists the ways to write flags: --name and -x.
func written(flags ...argv.Flag) []string {
	var all []string
	for _, f := range flags {
		all = append(all, "--"+f.Name)
		if f.Short != "" {
			all = append(all, "-"+f.Short)
		}
	}
	return all
}

// quoted is text as one word of a shell, with nothing in it that the shell acts on.
func quoted(text string) string { return "'" + strings.ReplaceAll(text, "'", `'\''`) + "'" }
