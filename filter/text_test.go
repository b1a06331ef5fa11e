package filter

import (
	"bytes"
	"encoding/json"
	"errors"
	"flag"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"reflect"
	"strings"
	"testing"
	"unicode/utf8"
)

var update = flag.Bool("update", false, "write the golden files anew")

// rate makes one for tests.
func rate(value, low, high float64, rows int) Rate {
	return Rate{Value: Number(value), Low: Number(low), High: Number(high), Rows: rows}
}

// full is the report of an invented line with something in every place.
func full() *Report {
	nan := notANumber()
	return &Report{
		Version: ReportVersion, Mode: "divert", Precision: 0.95, Threshold: 0.9123, Snapshot: "5d1f0c9a77e2",
		Window: WindowUsed{Kind: "sliding", Records: 20000, SpanSeconds: 604800, Trained: 19988, Sampled: true},
		Rows: Rows{In: 1234567, Tagged: 1204567, Quarantine: 30000, Scored: 1234000,
			Verdicts: Verdicts{Pass: 1150000, Suspect: 44000, Quarantine: 40000, Unscored: 567},
			Reasons:  Reasons{NoLabel: 300, NewClass: 60, NotFinite: 7, WarmingUp: 100, InputsChanged: 100}},
		Noise: &Noise{Share: rate(0.0512, 0.044, 0.0581, 20000), Model: "sparse", Unclear: []string{"second"},
			Classes: []Named{{"cull", rate(0.0002, 0, 0.004, 2400)}, {"first", rate(0.081, 0.07, 0.093, 9000)}, {"second", Rate{nan, nan, nan, 0}}},
			Sources: []Named{{"Anke", rate(0.01, 0.004, 0.02, 6000)}, {"Bero\x1b[31m", rate(0.13, 0.11, 0.15, 7000)}},
			Flip: [][]Rate{{rate(0.99, 0.98, 1, 2400), rate(0.01, 0, 0.02, 2400), rate(0, 0, 0.01, 2400)},
				{rate(0.002, 0, 0.01, 9000), rate(0.918, 0.9, 0.93, 9000), rate(0.08, 0.06, 0.1, 9000)},
				{{nan, nan, nan, 0}, {nan, nan, nan, 0}, {nan, nan, nan, 0}}}},
		Latest: &Noise{Share: rate(0.061, 0.05, 0.073, 20000)},
		Choice: &Choice{Encoder: "depth 8, leaves of 5", Q: -0.5, Lambda: 0.003,
			Why:     "the highest likelihood of the observed labels out of fold, 0.031 nats a record above the next of the eighteen that were tried",
			Members: []Member{{"linear", 0.81}, {"vote", 0.4242}}},
		Chains:   []Chain{{"graduated", 1200, 1020, 0.0004}, {"warm", 1180, 160, 0.012}, {"annealed", 60, 20, 0.002}},
		Retrains: Retrains{Cold: 1, Warm: 1170, Failed: 2},
		Breaker: Breaker{Open: true, Opened: 2, Events: []BreakerEvent{
			{Row: 400123, Open: true, Cause: "change", Why: "from row 400,101 on the labels disagree with the model far more often than in the window, where up to 6.0 % is normal"},
			{Row: 404000, Cause: "change", Why: "3 retrains in a row found disagreement back to normal, the last 5.1 %"},
			{Row: 900000, Open: true, Cause: "class-budget", Class: "first", Why: `the verdict is quarantine for 251 of the last 3000 "first" records; 250 may be held back`}}},
		Times:  []Spent{{"read", 3.21}, {"fit/search", 12.5}, {"fit/chains", 300.25}, {"score", 4}, {"write", 9.999}},
		Fields: []FieldUse{{"diameter_mm", "feature", "number", ""}, {"cultivar", "feature", "category", ""}, {"grade", "label", "", ""}},
		Notes:  []string{"the window holds 15000 rows, not 20000, because of window.bytes"},
	}
}

// bare is the report of a run that could not train.
func bare() *Report {
	return &Report{Version: ReportVersion, Mode: "observe", Precision: 0.95, Threshold: notANumber(), Window: WindowUsed{Kind: "whole"},
		Rows:  Rows{In: 12, Tagged: 12, Verdicts: Verdicts{Unscored: 12}, Reasons: Reasons{WarmingUp: 12}},
		Notes: []string{"no record could be scored: too few labelled rows to learn from"}}
}

// many is a report with more classes and sources than fit.
func many() *Report {
	r := full()
	r.Latest, r.Threshold, r.Noise = nil, 1.5, &Noise{Share: rate(0.1, 0.05, 0.2, 100)}
	for i := range 26 {
		name := strings.Repeat(string(rune('a'+i)), 3*i+1)
		r.Noise.Classes = append(r.Noise.Classes, Named{name, rate(float64(i)/100, 0, 0.3, i)})
		r.Noise.Sources = append(r.Noise.Sources, Named{name, rate(float64(i)/100, 0, 0.3, i)})
		row := make([]Rate, 26)
		row[(i+1)%26] = rate(float64(i)/50, 0, 0.6, 9)
		r.Noise.Flip = append(r.Noise.Flip, row)
		r.Breaker.Events = append(r.Breaker.Events, BreakerEvent{Row: int64(i), Open: i%2 == 0, Cause: "budget", Why: "so it is"})
		r.Fields = append(r.Fields, FieldUse{Path: name, Use: "feature", Kind: "number"})
	}
	return r
}

func TestSummaryReadsAsItShould(t *testing.T) {
	for name, r := range map[string]*Report{"full": full(), "bare": bare(), "many": many()} {
		t.Run(name, func(t *testing.T) {
			var got bytes.Buffer
			if err := r.WriteText(&got); err != nil {
				t.Fatal(err)
			}
			path := filepath.Join("testdata", "summary", name+".golden")
			if *update {
				if err := os.WriteFile(path, got.Bytes(), 0o644); err != nil {
					t.Fatal(err)
				}
			}
			want, err := os.ReadFile(path)
			if err != nil {
				t.Fatal(err)
			}
			if got.String() != string(want) {
				t.Errorf("%s differs: %s", path, firstDifference(got.String(), string(want)))
			}
			for line := range strings.Lines(got.String()) {
				if n := utf8.RuneCountInString(strings.TrimSuffix(line, "\n")); n > pageWidth || strings.HasSuffix(line, " \n") {
					t.Errorf("line of %d columns, or with blanks at its end: %q", n, line)
				}
				if strings.ContainsAny(line, "\x1b\t\r") {
					t.Errorf("a terminal would not show this as it is: %q", line)
				}
			}
		})
	}
}

func TestSummaryGivesTheWritersError(t *testing.T) {
	full := errors.New("disk full")
	if err := bare().WriteText(writerFunc(func([]byte) (int, error) { return 0, full })); !errors.Is(err, full) {
		t.Errorf("got %v", err)
	}
}

type writerFunc func([]byte) (int, error)

func (f writerFunc) Write(p []byte) (int, error) { return f(p) }

// The JSON form of version 1 is a promise, numbers that are not known included.
func TestReportReadsBackAsItWas(t *testing.T) {
	for name, r := range map[string]*Report{"full": full(), "bare": bare()} {
		b, err := json.MarshalIndent(r, "", "  ")
		if err != nil {
			t.Fatal(err)
		}
		path := filepath.Join("testdata", "report", name+".json")
		if *update {
			if err := os.WriteFile(path, append(b, '\n'), 0o644); err != nil {
				t.Fatal(err)
			}
		}
		want, err := os.ReadFile(path)
		if err != nil {
			t.Fatal(err)
		}
		if string(b)+"\n" != string(want) {
			t.Errorf("%s differs: %s", path, firstDifference(string(b)+"\n", string(want)))
		}
		var back Report
		if err := json.Unmarshal(want, &back); err != nil {
			t.Fatal(err)
		}
		again, _ := json.MarshalIndent(&back, "", "  ")
		if !bytes.Equal(again, b) || fmt.Sprint(back.Rows) != fmt.Sprint(r.Rows) {
			t.Errorf("%s reads back as another report", name)
		}
	}
}

func TestNumbersAreWrittenForPeople(t *testing.T) {
	for n, want := range map[int64]string{0: "0", 999: "999", 1000: "1,000", 1234567: "1,234,567", -1000: "-1,000", -999: "-999"} {
		if got := thousands(n); got != want {
			t.Errorf("%d is written %s, want %s", n, got, want)
		}
	}
	for x, want := range map[float64]string{0: "0.0 %", 0.0004: "<0.1 %", 0.0512: "5.1 %", 1: "100.0 %", math.Inf(1): "-"} {
		if got := percent(x); got != want {
			t.Errorf("%v is written %s, want %s", x, got, want)
		}
	}
	for _, c := range []struct{ in, want string }{{"", `""`}, {"Gala", "Gala"}, {"a\nb", `a\nb`}, {"\xff", `\xff`},
		{"Äpfel", "Äpfel"}, {strings.Repeat("x", 30), strings.Repeat("x", 23) + "…"}} {
		if got := shown(c.in); got != c.want {
			t.Errorf("%q is shown as %s, want %s", c.in, got, c.want)
		}
	}
}

// Every field of the report has a name in JSON, in lower case.
func TestReportFieldsHaveNames(t *testing.T) {
	var walk func(reflect.Type)
	walk = func(typ reflect.Type) {
		switch typ.Kind() {
		case reflect.Pointer, reflect.Slice:
			walk(typ.Elem())
		case reflect.Struct:
			for i := range typ.NumField() {
				f := typ.Field(i)
				tag := strings.Split(f.Tag.Get("json"), ",")[0]
				if !f.Anonymous && (tag == "" || tag != strings.ToLower(tag)) {
					t.Errorf("%v.%s has the name %q", typ, f.Name, tag)
				}
				walk(f.Type)
			}
		}
	}
	walk(reflect.TypeFor[Report]())
}
