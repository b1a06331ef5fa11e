package main

import (
	"context"
	"encoding/json"
	"fmt"
	"os"

	"labelweir/filter/cmd/labelweir/internal/argv"
	"labelweir/filter/cmd/labelweir/internal/inspect"
	"labelweir/model"
)

func inspectCommand() command {
	return command{
		name: "inspect", usage: "SNAPSHOT [--json]", brief: "tells what a saved snapshot was trained on and what it found",
		about: "SNAPSHOT is a file that sweep --snapshot has written.",
		flags: func() []argv.Flag { return inspectFlags(new(bool)) },
		run:   runInspect,
	}
}

func inspectFlags(asJSON *bool) []argv.Flag {
	return []argv.Flag{{Name: "json", Brief: "for programs", Set: func(string) error { *asJSON = true; return nil }}}
}

func runInspect(_ context.Context, p *process, args []string) error {
	asJSON := false
	operands, err := argv.Parse(inspectFlags(&asJSON), args)
	if err != nil {
		return err
	}
	if len(operands) != 1 {
		return usagef("inspect: wants one snapshot; write labelweir inspect FILE")
	}
	snapshot, err := readSnapshot(operands[0])
	if err != nil {
		return err
	}
	if !asJSON {
		return inspect.Text(p.out, snapshot.ID(), snapshot.Facts())
	}
	e := json.NewEncoder(p.out)
	e.SetEscapeHTML(false)
	e.SetIndent("", "  ")
	return e.Encode(struct {
		Snapshot string `json:"snapshot"`
		*model.Facts
	}{snapshot.ID(), snapshot.Facts()})
}

func readSnapshot(path string) (*model.Snapshot, error) {
	file, err := os.Open(path)
	if err != nil {
		return nil, &failure{exitInput, fmt.Errorf("%s: %w; name a file that sweep --snapshot has written", path, plain(err))}
	}
	defer file.Close()
	snapshot, err := model.ReadSnapshot(file)
	if err != nil {
		return nil, &failure{exitInput, fmt.Errorf("%s: %w; name a file that sweep --snapshot has written", path, plain(err))}
	}
	return snapshot, nil
}
