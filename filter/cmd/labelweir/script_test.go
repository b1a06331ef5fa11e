package main

import (
	"errors"
	"flag"
	"os"
	"os/exec"
	"strconv"
	"testing"

	"github.com/rogpeppe/go-internal/testscript"
)

var update = flag.Bool("update", false, "write what commands said into the scripts")

func TestMain(m *testing.M) {
	testscript.Main(m, map[string]func(){
		"labelweir": func() { os.Exit(start()) },
		"tags":      tagsMain,
	})
}

// TestScripts runs testdata/script/*.txtar. A script's first words are commands; labelweir is this program, and
// "exits CODE COMMAND..." runs a command that must end with that exit code.
func TestScripts(t *testing.T) {
	testscript.Run(t, testscript.Params{
		UpdateScripts:      *update,
		Dir:                "testdata/script",
		RequireUniqueNames: true,
		Cmds: map[string]func(*testscript.TestScript, bool, []string){
			"exits":   exits,
			"mkarrow": mkarrow,
			"apples":  apples,
			"convert": convert,
			"begins":  begins,
			"spoil":   spoil,
		},
	})
}

func exits(ts *testscript.TestScript, neg bool, args []string) {
	if neg || len(args) < 2 {
		ts.Fatalf("usage: exits CODE COMMAND [ARGUMENT...]")
	}
	want, err := strconv.Atoi(args[0])
	ts.Check(err)
	got := 0
	if err := ts.Exec(args[1], args[2:]...); err != nil {
		var e *exec.ExitError
		if !errors.As(err, &e) {
			ts.Fatalf("%s: %v", args[1], err)
		}
		got = e.ExitCode()
	}
	if got != want {
		ts.Fatalf("exit code %d, want %d", got, want)
	}
}
