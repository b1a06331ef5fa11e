package complete

import (
	"fmt"
	"strings"
)

// zsh writes a function for zsh's completion system (zshcompsys(1)): _describe for commands, _arguments for the rest.
func (p Program) zsh(b *strings.Builder) {
	fmt.Fprintf(b, "#compdef %s\n# Completion of %s in zsh: source <(%s completion zsh)\n_%s() {\n\tlocal -a commands=(\n", p.Name, p.Name, p.Name, p.Name)
	for _, c := range p.Commands {
		fmt.Fprintf(b, "\t\t%s\n", quoted(c.Name+":"+strings.ReplaceAll(c.Brief, ":", `\:`)))
	}
	fmt.Fprintf(b, "\t)\n\tif ((CURRENT == 2)); then\n\t\t_describe command commands\n\t\treturn\n\tfi\n\tshift words\n\t((CURRENT--))\n\tcase $words[1] in\n")
	for _, c := range p.Commands {
		fmt.Fprintf(b, "\t%s)\n\t\t_arguments \\\n", c.Name)
		for _, f := range c.Flags {
			for _, w := range written(f) {
				spec := w + "[" + bracketed(f.Brief) + "]"
				switch words := p.Values[f.Takes]; {
				case f.Takes == "":
				case takesFile(f):
					spec += ":" + f.Takes + ":_files"
				case words != nil:
					spec += ":" + f.Takes + ":(" + strings.Join(words, " ") + ")"
				default:
					spec += ":" + f.Takes + ":"
				}
				fmt.Fprintf(b, "\t\t\t%s \\\n", quoted(spec))
			}
		}
		rest := "*:FILE:_files"
		if c.Words != nil {
			rest = "*:WORD:(" + strings.Join(c.Words, " ") + ")"
		}
		fmt.Fprintf(b, "\t\t\t%s ;;\n", quoted(rest))
	}
	fmt.Fprintf(b, "\tesac\n}\ncompdef _%s %s\n", p.Name, p.Name)
}

// bracketed is text that may stand in the brackets of an argument's description.
func bracketed(text string) string {
	return strings.NewReplacer(`\`, `\\`, "[", `\[`, "]", `\]`, ":", `\:`).Replace(text)
}
