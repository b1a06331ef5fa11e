package main

import (
	"context"
	"fmt"
	"runtime/debug"
)

func versionCommand() command {
	return command{
		name: "version", brief: "tells which build this is", words: noWords,
		run: func(_ context.Context, p *process, args []string) error {
			if err := noOperands("version", args); err != nil {
				return err
			}
			fmt.Fprintln(p.out, version())
			return nil
		},
	}
}

// version gives the module's version, the commit and the Go release, as far as the build has recorded them.
func version() string {
	info, ok := debug.ReadBuildInfo()
	if !ok {
		return "labelweir, built without build information"
	}
	release, commit, changed := info.Main.Version, "unknown", ""
	if release == "" {
		release = "(devel)"
	}
	for _, s := range info.Settings {
		switch s.Key {
		case "vcs.revision":
			commit = s.Value
		case "vcs.modified":
			if s.Value == "true" {
				changed = " with changes"
			}
		}
	}
	return fmt.Sprintf("labelweir %s, commit %s%s, %s", release, commit, changed, info.GoVersion)
}
