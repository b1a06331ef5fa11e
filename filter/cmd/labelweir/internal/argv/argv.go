// Package argv reads the arguments of one command: long flags with two dashes, before or behind the operands.
package argv

import (
	"fmt"
	"strings"

	"labelweir/filter"
)

// Flag is one flag of a command.
type Flag struct {
	Name  string             // long name, without dashes
	Short string             // one letter, or empty
	Takes string             // what its value is, as help shows it (ROWS, FILE); empty: a switch, which takes none
	Brief string             // one line of help
	Set   func(string) error // takes the value; "true" for a switch
}

// Error is a fault in the arguments.
type Error struct {
	Where string // the flag or operand as it was written
	What  string // what is wrong and what to do
}

func (e *Error) Error() string { return e.Where + ": " + e.What }

// Parse hands every flag in args to its Set and returns the other arguments in order. Accepted are --name VALUE,
// --name=VALUE, -x VALUE, and -- after which everything is an operand. A flag given twice is an error, so that no
// earlier value is lost silently. Every error is an *Error.
func Parse(flags []Flag, args []string) (operands []string, err error) {
	seen := make(map[string]bool)
	for len(args) > 0 {
		arg := args[0]
		args = args[1:]
		if arg == "--" {
			return append(operands, args...), nil
		}
		if len(arg) < 2 || arg[0] != '-' {
			operands = append(operands, arg)
			continue
		}
		written, value, joined := strings.Cut(arg, "=")
		f := find(flags, written)
		if f == nil {
			return nil, unknown(flags, written)
		}
		if seen[f.Name] {
			return nil, &Error{written, "given twice; keep one"}
		}
		seen[f.Name] = true
		// A flag where a value should stand is a forgotten value, not the value.
		missing := !joined && (len(args) == 0 || find(flags, args[0]) != nil)
		if args, err = assign(f, written, value, joined, missing, args); err != nil {
			return nil, err
		}
	}
	return operands, nil
}

// assign hands f its value, from the same argument or the next one, and returns what is left of args.
func assign(f *Flag, written, value string, joined, missing bool, args []string) ([]string, error) {
	switch {
	case f.Takes == "" && joined:
		return nil, &Error{written, "takes no value; leave out =" + value}
	case f.Takes == "":
		value = "true"
	case missing:
		return nil, &Error{written, fmt.Sprintf("wants a value; write %s %s", written, f.Takes)}
	case !joined:
		value, args = args[0], args[1:]
	}
	if err := f.Set(value); err != nil {
		return nil, &Error{written, err.Error()}
	}
	return args, nil
}

func find(flags []Flag, written string) *Flag {
	for i := range flags {
		f := &flags[i]
		if written == "--"+f.Name || (f.Short != "" && written == "-"+f.Short) {
			return f
		}
	}
	return nil
}

func unknown(flags []Flag, written string) error {
	names := make([]string, len(flags))
	for i := range flags {
		names[i] = flags[i].Name
	}
	if near := filter.Nearest(strings.TrimLeft(written, "-"), names); near != "" {
		return &Error{written, "unknown flag; did you mean --" + near + "?"}
	}
	return &Error{written, "unknown flag; see labelweir help"}
}
