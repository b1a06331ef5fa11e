package main

import (
	"bufio"
	"fmt"
	"math"
	"os"
	"strconv"
	"strings"
)

// field is one numeric figure of a cell, as it stands in the file of cells.
type field struct {
	name string
	of   func(*figures) float64
}

// fields lists the numeric figures of a cell in the order of the file.
func fields() []field {
	return []field{
		{"rows", func(f *figures) float64 { return float64(f.rows) }},
		{"rate", func(f *figures) float64 { return f.rate }},
		{"ap", func(f *figures) float64 { return f.ap }},
		{"ece", func(f *figures) float64 { return f.calibration.Error() }},
		{"threshold", func(f *figures) float64 { return f.threshold }},
		{"held_precision", func(f *figures) float64 { return f.held.Precision() }},
		{"held_recall", func(f *figures) float64 { return f.held.Recall() }},
		{"held_share", func(f *figures) float64 { return f.held.Share() }},
		{"prec95", func(f *figures) float64 { return f.near.Precision() }},
		{"rec95", func(f *figures) float64 { return f.near.Recall() }},
		{"share95", func(f *figures) float64 { return f.near.Share() }},
		{"share", func(f *figures) float64 { return f.share.Value }},
		{"share_low", func(f *figures) float64 { return f.share.Low }},
		{"share_high", func(f *figures) float64 { return f.share.High }},
		{"share_error", func(f *figures) float64 { return math.Abs(f.share.Value - f.rate) }},
		{"covers", (*figures).covers},
		{"flip_max", func(f *figures) float64 { return f.flipMax }},
		{"flip_mean", func(f *figures) float64 { return f.flipMean }},
		{"unscored", func(f *figures) float64 { return float64(f.unscored) }},
		{"seconds", func(f *figures) float64 { return f.seconds }},
		{"q", func(f *figures) float64 { return f.choice.Q }},
		{"lambda", func(f *figures) float64 { return f.choice.Lambda }},
	}
}

// value is the figure of a cell; NaN when the cell has an error.
func (d field) value(f *figures) float64 {
	if f.err != nil {
		return math.NaN()
	}
	return d.of(f)
}

// fieldNamed gives the field of a name, which must be one of fields.
func fieldNamed(name string) field {
	for _, d := range fields() {
		if d.name == name {
			return d
		}
	}
	panic("judge: no figure " + name)
}

// writeCells writes one line a cell, tab-separated, under a head of names; NA stands for a figure without a value.
func writeCells(path string, cells []figures) error {
	out, err := os.Create(path)
	if err != nil {
		return err
	}
	w := bufio.NewWriter(out)
	fmt.Fprint(w, "table\tplan\tseed")
	for _, d := range fields() {
		fmt.Fprint(w, "\t", d.name)
	}
	fmt.Fprintln(w, "\tencoder\tnoise_model\terror")
	for i := range cells {
		f := &cells[i]
		fmt.Fprintf(w, "%s\t%s\t%d", f.table, f.cell.Plan, f.cell.Seed)
		for _, d := range fields() {
			fmt.Fprint(w, "\t", exact(d.value(f)))
		}
		fmt.Fprintf(w, "\t%s\t%s\t%s\n", f.choice.Encoder, f.noiseModel, oneLine(f.err))
	}
	if err := w.Flush(); err != nil {
		out.Close()
		return err
	}
	return out.Close()
}

func oneLine(err error) string {
	if err == nil {
		return ""
	}
	return strings.Join(strings.Fields(err.Error()), " ")
}

// exact writes a figure for a file, number one for a table.
func exact(v float64) string {
	if math.IsNaN(v) {
		return "NA"
	}
	return strconv.FormatFloat(v, 'g', 6, 64)
}

func number(v float64) string {
	if math.IsNaN(v) {
		return "-"
	}
	return strconv.FormatFloat(v, 'f', 3, 64)
}

func signed(v float64) string {
	if math.IsNaN(v) {
		return "-"
	}
	return fmt.Sprintf("%+.3f", v)
}

// mean of the values that are not NaN; NaN without any.
func mean(values []float64) float64 {
	sum, n := 0.0, 0.0
	for _, v := range values {
		if !math.IsNaN(v) {
			sum += v
			n++
		}
	}
	return sum / n
}
