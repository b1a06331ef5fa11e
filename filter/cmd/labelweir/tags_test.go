package main

import (
	"errors"
	"fmt"
	"io"
	"maps"
	"os"
	"slices"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
	"github.com/apache/arrow/go/v16/arrow/ipc"
)

// tagsMain is the command "tags FILE" of the scripts: it prints how many rows an output has and, sorted, how many of them
// have each verdict with its reason.
func tagsMain() {
	if err := printTags(os.Stdout, os.Args[1]); err != nil {
		fmt.Fprintln(os.Stderr, err)
		os.Exit(1)
	}
}

func printTags(w io.Writer, path string) error {
	file, err := os.Open(path)
	if err != nil {
		return err
	}
	defer file.Close()
	r, err := ipc.NewFileReader(file)
	if err != nil {
		return err
	}
	defer r.Close()
	counts, rows := make(map[string]int), int64(0)
	for i := range r.NumRecords() {
		record, err := r.Record(i)
		if err != nil {
			return err
		}
		rows += record.NumRows()
		if err := countTags(record, counts); err != nil {
			return err
		}
	}
	fmt.Fprintln(w, rows, "rows")
	for _, name := range slices.Sorted(maps.Keys(counts)) {
		fmt.Fprintln(w, counts[name], name)
	}
	return nil
}

func countTags(record arrow.Record, counts map[string]int) error {
	column := func(name string) arrow.Array {
		for _, i := range record.Schema().FieldIndices(name) {
			return record.Column(i)
		}
		return nil
	}
	verdict, ok := column("weir_verdict").(*array.Dictionary)
	reason, ok2 := column("weir_reason").(*array.Dictionary)
	score, ok3 := column("weir_score").(*array.Float64)
	if !ok || !ok2 || !ok3 {
		return errors.New("tag columns are missing or of another type")
	}
	word := func(d *array.Dictionary, i int) string {
		return d.Dictionary().(*array.String).Value(d.GetValueIndex(i))
	}
	for i := range verdict.Len() {
		name := word(verdict, i)
		if reason.IsValid(i) {
			name += " " + word(reason, i)
		}
		if score.IsValid(i) == reason.IsValid(i) {
			return fmt.Errorf("row %d has a score and a reason to have none, or neither", i)
		}
		counts[name]++
	}
	return nil
}
