package arrowfile_test

import (
	"context"
	"fmt"
	"io"
	"os"
	"path/filepath"

	"labelweir/connectors/arrowfile"
	"labelweir/connectors/table"
	"labelweir/filter"
	"labelweir/model"
)

// Every record of a file goes to the tagged output, unscored.
func Example() {
	dir, err := os.MkdirTemp("", "packing")
	if err != nil {
		fmt.Println(err)
		return
	}
	defer os.RemoveAll(dir)
	if err := tagAll("testdata/apples.arrow", filepath.Join(dir, "tagged.arrow")); err != nil {
		fmt.Println(err)
	}
	// Output:
	// apple_id is left out: counts the rows
	// graded_at is left out: a date or time
	// grade is left out: the label
	// 100 records, classes [juice first extra]
}

func tagAll(in, out string) error {
	ctx, opt := context.Background(), table.DefaultOptions()
	src, err := arrowfile.Open(in, filter.Record{Label: "grade"}, opt)
	if err != nil {
		return err
	}
	defer src.Close()
	for _, c := range src.Choice() {
		if !c.Used {
			fmt.Printf("%s is left out: %s\n", c.Column, c.Why)
		}
	}
	sink, err := table.Create(table.OutputPaths{Tagged: out}, src, opt)
	if err != nil {
		return err
	}
	defer sink.Close() // without Commit nothing is left
	var classes []string
	for {
		b, err := src.Next(ctx)
		if err == io.EOF {
			break
		}
		if err != nil {
			return err
		}
		tags := make([]filter.Tag, b.Rows())
		for i := range tags {
			tags[i] = filter.Tag{Verdict: filter.Unscored, Reason: model.WarmingUp}
		}
		classes = b.Table.Classes
		err = sink.Deliver(ctx, b, tags)
		b.Release()
		if err != nil {
			return err
		}
	}
	if err := sink.Commit(ctx); err != nil {
		return err
	}
	tagged, _ := sink.Rows()
	fmt.Printf("%d records, classes %v\n", tagged, classes)
	return nil
}
