package main

import (
	"context"
	"fmt"
	"io"
	"strings"

	"labelweir/filter"
	"labelweir/filter/cmd/labelweir/internal/argv"
)

// command is one of the program's commands.
type command struct {
	name  string
	usage string             // arguments, as help shows them
	brief string             // one line
	about string             // what help adds below the usage
	shown []example          // what help shows it with
	flags func() []argv.Flag // for help only; nil: none
	words func() []string    // what operands can be, for completion; nil: files
	run   func(ctx context.Context, p *process, args []string) error
}

// example is a command line that does something worth showing.
type example struct {
	does string // begins in small letters
	line string
}

// commands lists them in the order in which help shows them.
func commands() []command {
	return []command{
		demoCommand(),
		sweepCommand(),
		inspectCommand(),
		versionCommand(),
		completionCommand(),
		helpCommand(),
	}
}

// run runs one command and gives the exit code.
func run(ctx context.Context, p *process, args []string) int {
	err := dispatch(ctx, p, args)
	if p.out.err != nil {
		err = &failure{exitWrite, fmt.Errorf("standard output: can't be written: %w; send it elsewhere", plain(p.out.err))}
	}
	if err != nil {
		say(ctx, p, err)
	}
	return code(ctx, err)
}

func dispatch(ctx context.Context, p *process, args []string) error {
	if len(args) == 0 {
		overview(p.err)
		return usagef("no command given; begin with labelweir demo")
	}
	name, args := args[0], args[1:]
	if name == "--help" || name == "-h" {
		name = "help"
	}
	if name == "--version" {
		name = "version"
	}
	c, err := findCommand(name)
	if err != nil {
		return err
	}
	for _, a := range args {
		if a == "--" {
			break
		}
		if a == "--help" || a == "-h" {
			c.help(p.out)
			return nil
		}
	}
	return c.run(ctx, p, args)
}

func findCommand(name string) (*command, error) {
	var names []string
	for _, c := range commands() {
		if c.name == name {
			return &c, nil
		}
		names = append(names, c.name)
	}
	if near := filter.Nearest(name, names); near != "" {
		return nil, usagef("%s: unknown command; did you mean %s?", name, near)
	}
	return nil, usagef("%s: unknown command; labelweir help lists them", name)
}

// noOperands refuses arguments that a command does not take.
func noOperands(name string, operands []string) error {
	if len(operands) > 0 {
		return usagef("%s: not expected; labelweir help %s shows what is", strings.Join(operands, " "), name)
	}
	return nil
}

func helpCommand() command {
	return command{
		name: "help", usage: "[COMMAND]", brief: "shows how a command is used", words: commandNames,
		run: func(_ context.Context, p *process, args []string) error {
			if len(args) == 0 {
				overview(p.out)
				return nil
			}
			c, err := findCommand(args[0])
			if err != nil {
				return err
			}
			c.help(p.out)
			return nil
		},
	}
}

func commandNames() []string {
	var names []string
	for _, c := range commands() {
		names = append(names, c.name)
	}
	return names
}

// noWords is for commands without operands.
func noWords() []string { return []string{} }

func overview(w io.Writer) {
	fmt.Fprint(w, "labelweir finds wrong labels in labelled records.\n\nusage: labelweir COMMAND\n\n")
	for _, c := range commands() {
		fmt.Fprintf(w, "  %-10s %s\n", c.name, c.brief)
	}
	fmt.Fprint(w, "\nlabelweir help COMMAND shows its flags.\n")
}

// help shows how the command is used.
func (c *command) help(w io.Writer) {
	fmt.Fprintf(w, "labelweir %s: %s\n\nusage: labelweir %s\n", c.name, c.brief, strings.TrimSpace(c.name+" "+c.usage))
	if c.about != "" {
		fmt.Fprintf(w, "\n%s\n", strings.TrimSpace(c.about))
	}
	for _, e := range c.shown {
		fmt.Fprintf(w, "\n  %s:\n    %s\n", e.does, e.line)
	}
	if c.flags == nil {
		return
	}
	fmt.Fprintln(w)
	for _, f := range c.flags() {
		name := "--" + f.Name
		if f.Short != "" {
			name = "-" + f.Short + ", " + name
		}
		fmt.Fprintf(w, "  %-24s %s\n", strings.TrimSpace(name+" "+f.Takes), f.Brief)
	}
}
