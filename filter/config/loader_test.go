package config

import (
	"errors"
	"strings"
	"testing"
	"time"

	"labelweir/filter"
)

// lay gives a loader with these layers; flags are path=value.
func lay(file string, environ []string, flags ...string) *Loader {
	l := NewLoader()
	for _, f := range flags {
		path, text, _ := strings.Cut(f, "=")
		written := "--flag"
		for _, s := range Settings() {
			if s.Path == path {
				written = "--" + s.Flag
			}
		}
		l.Flag(written, path, text)
	}
	l.Environment(environ)
	if file != "" {
		l.File("weir.yaml", []byte(file))
	}
	return l
}

func TestFlagBeatsEnvironmentBeatsFileBeatsDefault(t *testing.T) {
	const file = "window: {records: 100, bytes: 1MiB}\nfilter: {budget: 1%}"
	environ := []string{"HOME=/root", "LABELWEIR_WINDOW_RECORDS=200", "LABELWEIR_FILTER_BUDGET=2%"}
	c, err := lay(file, environ, "window.records=300").Config()
	if err != nil {
		t.Fatal(err)
	}
	if c.Filter.Records != 300 || c.Filter.Budget != 0.02 || c.Filter.Bytes != 1<<20 || c.Filter.Precision != 0.95 {
		t.Errorf("records %d, budget %v, bytes %d, precision %v", c.Filter.Records, c.Filter.Budget, c.Filter.Bytes, c.Filter.Precision)
	}
}

func TestTheWindowFlagLetsItSlideAndTheFileAloneDoesNot(t *testing.T) {
	for _, c := range []struct {
		l    *Loader
		want bool
	}{
		{lay("", nil), false},
		{lay("window: {records: 500}", nil), false},
		{lay("", nil, "window.records=500"), true},
		{lay("", nil, "window.span=7d"), true},
		{lay("window: {span: 7d}", nil), true},
		{lay("window: {slide: true}", nil), true},
	} {
		got, err := c.l.Config()
		if err != nil || got.Filter.Sliding != c.want {
			t.Errorf("%v: slides %v, error %v", c.l.values, got.Filter.Sliding, err)
		}
	}
}

func TestEverySettingCanComeFromTheEnvironment(t *testing.T) {
	values := map[string]string{
		"record.fields": "a,b:category", "window.records": "99", "window.span": "2w", "window.bytes": "3kB",
		"input.format": "parquet", "input.delimiter": "tab", "output.format": "csv",
		"input.trust": "true", "input.memory": "1GiB", "window.slide": "true", "retrain.every": "7", "retrain.seed": "18446744073709551615", "retrain.workers": "17",
		"filter.mode": "divert", "filter.precision": "0.9", "filter.budget": "1%", "filter.hold": "4",
		"filter.cooldown": "9", "filter.gate": "1.5%", "output.file.replace": "true", "output.file.resume": "true",
	}
	for _, s := range Settings() {
		value := values[s.Path]
		if value == "" {
			value = "some name"
		}
		c, err := lay("", []string{s.Variable() + "=" + value}).Config()
		if err != nil {
			t.Errorf("%s: %v", s.Variable(), err)
			continue
		}
		standard := Default()
		if s.Text(c) == s.Text(&standard) {
			t.Errorf("%s=%s changed nothing", s.Variable(), value)
		}
	}
}

func TestTextReadsBackTheSame(t *testing.T) {
	c := Default()
	c.Filter.Span, c.Filter.Bytes, c.Filter.Budget = 90*time.Minute, 1500, 1.0/3
	c.Filter.Retrain, c.Gate = filter.Every{Share: 0.07}, 0.123456789
	for _, s := range Settings() {
		text := s.Text(&c)
		if text == "" {
			continue // no name given
		}
		back := Default()
		if err := s.set(&back, text); err != nil || s.Text(&back) != text {
			t.Errorf("%s: %q came back as %q, %v", s.Path, text, s.Text(&back), err)
		}
	}
}

func TestFaultsOfAllLayersComeAtOnce(t *testing.T) {
	l := lay("window: {records: few}\nfiltre: {}", []string{
		"LABELWEIR_WINDOW_RECORD=1", "LABELWEIR_FILTER_MODE=halt", "LABELWEIR_RECORD_COLOUR=red", "LABELWEIR_SERVICE_HOST=10.0.0.1",
	}, "retrain.seed=x")
	_, err := l.Config()
	want := strings.Join([]string{
		`weir.yaml:1:19: window.records: "few" is not a whole number from 50 on`,
		`weir.yaml:2:1: filtre: unknown key; did you mean filter?`,
		`LABELWEIR_RECORD_COLOUR: unknown setting; unset it`,
		`LABELWEIR_WINDOW_RECORD: unknown setting; did you mean LABELWEIR_WINDOW_RECORDS?`,
		`LABELWEIR_FILTER_MODE: "halt" is not a mode; write observe or divert`,
		`--seed: "x" is not a whole number from 0 on`,
	}, "\n")
	var faults Faults
	if !errors.As(err, &faults) || err.Error() != want {
		t.Errorf("got\n%v\nwant\n%s", err, want)
	}
}

func TestAHigherLayerHidesAFaultyValueBelow(t *testing.T) {
	if _, err := lay("window: {records: few}", nil, "window.records=500").Config(); err != nil {
		t.Errorf("the flag did not win: %v", err)
	}
}

func TestSweepNamesWhatIsMissingOrDoesNotGoTogether(t *testing.T) {
	const enough = "input: {file: {path: in.arrow}}\nrecord: {label: grade}\noutput: {file: {tagged: out.arrow}}\n"
	for _, c := range []struct {
		name  string
		l     *Loader
		want  string
		layer Layer
	}{
		{"nothing on the command line", lay("", nil), "sweep: no file to read; name one, as in labelweir sweep grading.arrow\n" +
			"--label: not given; name the column of the labels\n--out: not given; name the file to write", FromFlag},
		{"nothing in the file", lay("window: {slide: true}", nil, "input.file.path=a", "record.label=b"),
			"weir.yaml: output.file.tagged: not given; name the file to write", FromFile},
		{"source is the label", lay(enough+"x: 1", nil), "weir.yaml:4:1: x: unknown key; the README lists all settings", FromFile},
		{"label as source", lay(enough, nil, "record.source=grade"), `--source: "grade" is the label already; name another column`, FromFlag},
		{"label as time", lay(enough, []string{"LABELWEIR_RECORD_TIME=grade"}), `LABELWEIR_RECORD_TIME: "grade" is the label already; name another column`, FromEnvironment},
		{"label as field", lay(enough, nil, "record.fields=a,grade"), `--fields: "grade" is the label already; leave it out here`, FromFlag},
		{"field twice", lay(enough, nil, "record.fields=a,b,a"), `--fields: "a" is the name of another field already; leave it out here`, FromFlag},
		{"hold without sliding", lay(enough, nil, "filter.hold=5"), "--hold: only a sliding window has look-ahead; give --window ROWS or --span TIME, or leave it out", FromFlag},
		{"span without times", lay(enough, nil, "window.span=7d"), "--span: wants the records' times; give --time COLUMN", FromFlag},
		{"divert without a file", lay(enough, nil, "filter.mode=divert"), "--mode: mode divert wants a file for what is held back; give --quarantine FILE", FromFlag},
		{"a file without divert", lay(enough, nil, "output.file.quarantine=q"), "--quarantine: nothing is held back in mode observe; give --mode divert, or leave it out", FromFlag},
		{"output over input", lay(enough, nil, "output.file.tagged=./in.arrow"), "--out: ./in.arrow is the input already; write to another file", FromFlag},
		{"one file twice", lay(enough, nil, "output.file.report=out.arrow"), "--report: out.arrow is the tagged output already; write to another file", FromFlag},
	} {
		t.Run(c.name, func(t *testing.T) {
			_, err := c.l.Sweep()
			var faults Faults
			if !errors.As(err, &faults) {
				t.Fatalf("got %v", err)
			}
			if err.Error() != c.want {
				t.Errorf("got  %v\nwant %s", err, c.want)
			}
			if faults[0].Layer != c.layer {
				t.Errorf("layer %d, want %d", faults[0].Layer, c.layer)
			}
		})
	}
	if _, err := lay(enough, nil).Sweep(); err != nil {
		t.Errorf("enough is not enough: %v", err)
	}
}

func TestVariablesAndPathsAreUnique(t *testing.T) {
	seen := make(map[string]bool)
	for _, s := range Settings() {
		for _, name := range []string{s.Path, s.Variable(), "--" + s.Flag} {
			if name != "--" && seen[name] {
				t.Errorf("%s stands twice", name)
			}
			seen[name] = true
		}
	}
}
