package complete

import (
	"fmt"
	"strings"
)

// fish writes one complete line a command, flag and list of words.
func (p Program) fish(b *strings.Builder) {
	fmt.Fprintf(b, "# Completion of %s in fish: %s completion fish | source\ncomplete -c %s -f\n", p.Name, p.Name, p.Name)
	for _, c := range p.Commands {
		fmt.Fprintf(b, "complete -c %s -n __fish_use_subcommand -a %s -d %s\n", p.Name, c.Name, escaped(c.Brief))
	}
	for _, c := range p.Commands {
		when := fmt.Sprintf("complete -c %s -n '__fish_seen_subcommand_from %s'", p.Name, c.Name)
		if c.Words == nil {
			fmt.Fprintf(b, "%s -F\n", when)
		} else if len(c.Words) > 0 {
			fmt.Fprintf(b, "%s -a %s\n", when, escaped(strings.Join(c.Words, " ")))
		}
		for _, f := range c.Flags {
			line := when + " -l " + f.Name
			if f.Short != "" {
				line += " -s " + f.Short
			}
			switch words := p.Values[f.Takes]; {
			case f.Takes == "":
			case takesFile(f):
				line += " -r -F"
			case words != nil:
				line += " -x -a " + escaped(strings.Join(words, " "))
			default:
				line += " -x"
			}
			fmt.Fprintf(b, "%s -d %s\n", line, escaped(f.Brief))
		}
	}
}

// escaped is text as one word of fish, whose single quotes know \' and \\.
func escaped(text string) string {
	return "'" + strings.NewReplacer(`\`, `\\`, "'", `\'`).Replace(text) + "'"
}
