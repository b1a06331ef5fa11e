package panel

import (
	"bufio"
	"fmt"
	"math"
	"os"
	"strconv"
	"strings"
)

// Baseline is what another method reached on one table and plan, as a mean over seeds; NaN where it has no figure.
type Baseline struct {
	Table, Plan, Method           string
	AP, ECE, Prec95, Share95, Rec float64
	Best                          bool // the method with the highest AP of its cell (plan clean: the lowest ECE)
}

// ReadBaselines reads a file of tab-separated lines with a head of column names; lines that begin with # are left out.
func ReadBaselines(path string) ([]Baseline, error) {
	lines, err := ReadTSV(path)
	if err != nil {
		return nil, err
	}
	out := make([]Baseline, len(lines))
	for i, l := range lines {
		out[i] = Baseline{Table: l["dataset"], Plan: l["plan"], Method: l["method"], AP: Number(l["ap"]), ECE: Number(l["ece"]),
			Prec95: Number(l["prec95"]), Share95: Number(l["share95"]), Rec: Number(l["rec95"]), Best: l["best"] == "*"}
	}
	return out, nil
}

// ReadTSV reads tab-separated lines into one map a line, by column name.
func ReadTSV(path string) ([]map[string]string, error) {
	f, err := os.Open(path)
	if err != nil {
		return nil, err
	}
	defer f.Close()
	var head []string
	var out []map[string]string
	in := bufio.NewScanner(f)
	for n := 1; in.Scan(); n++ {
		text := in.Text()
		if text == "" || strings.HasPrefix(text, "#") {
			continue
		}
		parts := strings.Split(text, "\t")
		if head == nil {
			head = parts
			continue
		}
		if len(parts) > len(head) {
			return nil, fmt.Errorf("%s: line %d: %d values for %d columns", path, n, len(parts), len(head))
		}
		line := map[string]string{}
		for i, v := range parts {
			line[head[i]] = v
		}
		out = append(out, line)
	}
	return out, in.Err()
}

// Number reads a figure; anything that is none, such as NA, is NaN.
func Number(text string) float64 {
	v, err := strconv.ParseFloat(text, 64)
	if err != nil {
		return math.NaN()
	}
	return v
}
