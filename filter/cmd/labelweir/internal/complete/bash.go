package complete

import (
	"fmt"
	"strings"

	"labelweir/filter/cmd/labelweir/internal/argv"
)

// bash writes a function that fills COMPREPLY, and has bash call it.
func (p Program) bash(b *strings.Builder) {
	fmt.Fprintf(b, "# Completion of %s in bash: source <(%s completion bash)\n_%s() {\n", p.Name, p.Name, p.Name)
	b.WriteString(`	local word=${COMP_WORDS[COMP_CWORD]} before=${COMP_WORDS[COMP_CWORD-1]} words= files=
	COMPREPLY=()
	if ((COMP_CWORD == 1)); then
`)
	var names []string
	for _, c := range p.Commands {
		names = append(names, c.Name)
	}
	fmt.Fprintf(b, "\t\twords=%s\n\telse\n\t\tcase ${COMP_WORDS[1]} in\n", quoted(strings.Join(names, " ")))
	for _, c := range p.Commands {
		p.bashCommand(b, c)
	}
	b.WriteString(`		esac
	fi
	if [[ -n $files ]]; then
		compopt -o default 2>/dev/null
		return
	fi
	COMPREPLY=($(compgen -W "$words" -- "$word"))
}
`)
	fmt.Fprintf(b, "complete -F _%s %s\n", p.Name, p.Name)
}

// bashCommand writes the case of one command: what may follow the word before, else flags and operands.
func (p Program) bashCommand(b *strings.Builder, c Command) {
	fmt.Fprintf(b, "\t\t%s)\n\t\t\tcase $before in\n", c.Name)
	var files, free []argv.Flag
	for _, f := range c.Flags {
		switch words := p.Values[f.Takes]; {
		case f.Takes == "":
		case takesFile(f):
			files = append(files, f)
		case words != nil:
			fmt.Fprintf(b, "\t\t\t%s) words=%s ;;\n", strings.Join(written(f), "|"), quoted(strings.Join(words, " ")))
		default:
			free = append(free, f)
		}
	}
	if len(files) > 0 {
		fmt.Fprintf(b, "\t\t\t%s) files=1 ;;\n", strings.Join(written(files...), "|"))
	}
	if len(free) > 0 {
		fmt.Fprintf(b, "\t\t\t%s) ;;\n", strings.Join(written(free...), "|"))
	}
	fmt.Fprintf(b, "\t\t\t*)\n\t\t\t\tif [[ $word == -* ]]; then words=%s\n", quoted(strings.Join(append(written(c.Flags...), "--help"), " ")))
	if c.Words == nil {
		b.WriteString("\t\t\t\telse files=1; fi ;;\n")
	} else {
		fmt.Fprintf(b, "\t\t\t\telse words=%s; fi ;;\n", quoted(strings.Join(c.Words, " ")))
	}
	b.WriteString("\t\t\tesac ;;\n")
}
