package argv

import (
	"errors"
	"fmt"
	"reflect"
	"strconv"
	"testing"
)

// parse runs Parse with a few flags and gives what they were set to.
func parse(args ...string) (set map[string]string, operands []string, err error) {
	set = make(map[string]string)
	keep := func(name string) func(string) error {
		return func(v string) error { set[name] = v; return nil }
	}
	number := func(v string) error {
		if _, err := strconv.Atoi(v); err != nil {
			return fmt.Errorf("%q is not a whole number", v)
		}
		set["window"] = v
		return nil
	}
	operands, err = Parse([]Flag{
		{Name: "label", Takes: "COLUMN", Set: keep("label")},
		{Name: "config", Short: "c", Takes: "FILE", Set: keep("config")},
		{Name: "replace", Set: keep("replace")},
		{Name: "window", Takes: "ROWS", Set: number},
	}, args)
	return set, operands, err
}

func TestFlagsMayStandAnywhere(t *testing.T) {
	want := map[string]string{"label": "grade", "config": "w.yaml", "replace": "true"}
	for _, args := range [][]string{
		{"--label", "grade", "-c", "w.yaml", "--replace", "a.arrow"},
		{"a.arrow", "--replace", "--label=grade", "--config=w.yaml"},
		{"--replace", "a.arrow", "-c=w.yaml", "--label", "grade"},
	} {
		set, operands, err := parse(args...)
		if err != nil || !reflect.DeepEqual(set, want) || !reflect.DeepEqual(operands, []string{"a.arrow"}) {
			t.Errorf("%q gave %v, %q, %v", args, set, operands, err)
		}
	}
}

func TestTwoDashesEndTheFlags(t *testing.T) {
	set, operands, err := parse("--", "--label", "-")
	if err != nil || len(set) != 0 || !reflect.DeepEqual(operands, []string{"--label", "-"}) {
		t.Errorf("got %v, %q, %v", set, operands, err)
	}
}

func TestAFlagsValueMayBeginWithADash(t *testing.T) {
	set, _, err := parse("--label", "-3", "--config=")
	if err != nil || set["label"] != "-3" || set["config"] != "" {
		t.Errorf("got %v, %v", set, err)
	}
}

func TestFaultsNameTheFlagAndWhatToDo(t *testing.T) {
	for _, c := range []struct {
		args []string
		want string
	}{
		{[]string{"--labl", "x"}, "--labl: unknown flag; did you mean --label?"},
		{[]string{"-label", "x"}, "-label: unknown flag; did you mean --label?"},
		{[]string{"--zzzzzz"}, "--zzzzzz: unknown flag; see labelweir help"},
		{[]string{"--label"}, "--label: wants a value; write --label COLUMN"},
		{[]string{"--label", "--replace"}, "--label: wants a value; write --label COLUMN"},
		{[]string{"--replace=yes"}, "--replace: takes no value; leave out =yes"},
		{[]string{"--window", "many"}, `--window: "many" is not a whole number`},
		{[]string{"-c", "a", "--config", "b"}, "--config: given twice; keep one"},
	} {
		_, _, err := parse(c.args...)
		var e *Error
		if !errors.As(err, &e) || err.Error() != c.want {
			t.Errorf("%q: got %v, want %s", c.args, err, c.want)
		}
	}
}
