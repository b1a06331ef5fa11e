package main

import (
	"context"
	"fmt"
	"slices"
	"strings"

	"labelweir/filter"
	"labelweir/filter/cmd/labelweir/internal/complete"
	"labelweir/filter/cmd/labelweir/internal/sweep"
)

func completionCommand() command {
	return command{
		name: "completion", usage: strings.Join(complete.Shells(), "|"), brief: "writes what a shell needs to complete command lines",
		about: `
In bash: source <(labelweir completion bash); in zsh: source <(labelweir completion zsh); in fish: labelweir completion
fish | source. Put the line into the shell's start-up file to have it always.`,
		words: complete.Shells,
		run:   runCompletion,
	}
}

func runCompletion(_ context.Context, p *process, args []string) error {
	if len(args) != 1 {
		return usagef("completion: wants one shell; write labelweir completion bash")
	}
	if shell := args[0]; !slices.Contains(complete.Shells(), shell) {
		if near := filter.Nearest(shell, complete.Shells()); near != "" {
			return usagef("%s: unknown shell; did you mean %s?", shell, near)
		}
		return usagef("%s: unknown shell; there are %s", shell, strings.Join(complete.Shells(), ", "))
	}
	return complete.Script(p.out, args[0], completed())
}

// completed is what there is to complete.
func completed() complete.Program {
	p := complete.Program{Name: "labelweir", Values: map[string][]string{
		"MODE":   {fmt.Sprint(filter.Observe), fmt.Sprint(filter.Divert)},
		"FORMAT": sweep.FormatNames(),
	}}
	for _, c := range commands() {
		one := complete.Command{Name: c.name, Brief: c.brief}
		if c.flags != nil {
			one.Flags = c.flags()
		}
		if c.words != nil {
			one.Words = c.words()
		}
		p.Commands = append(p.Commands, one)
	}
	return p
}
