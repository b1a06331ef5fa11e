package filter

import (
	"errors"
	"strings"
	"testing"

	"labelweir/window"
)

func TestConfigFaultsAreReportedAtOnce(t *testing.T) {
	if err := Default().Validate(); err != nil {
		t.Errorf("the defaults are refused: %v", err)
	}
	bad := Config{Records: 0, Span: -1, Bytes: 0, Retrain: Every{Share: 2}, Mode: 7, Precision: 0.5, Budget: 1.5,
		Hold: -1, Cooldown: 0, Workers: 0}
	err := bad.Validate()
	if !errors.Is(err, ErrConfig) {
		t.Fatalf("%v does not wrap ErrConfig", err)
	}
	for _, word := range []string{"window.records is 0", "window.span is -1ns", "window.bytes is 0", "share of 2;",
		"filter.mode is 7", "filter.precision is 0.5", "filter.budget is 1.5", "filter.hold is -1", "filter.cooldown is 0", "workers is 0"} {
		if !strings.Contains(err.Error(), word) {
			t.Errorf("%q is not in %q", word, err)
		}
	}
}

func TestConfigSettingsThatDoNotGoTogether(t *testing.T) {
	for name, c := range map[string]struct {
		change func(*Config)
		word   string
	}{
		"share and count":       {func(c *Config) { c.Retrain = Every{Share: 0.05, Rows: 10} }, "both a share and a count"},
		"neither":               {func(c *Config) { c.Retrain = Every{} }, "a share of 0;"},
		"negative count":        {func(c *Config) { c.Retrain = Every{Rows: -1} }, "retrain.every is -1;"},
		"span without sliding":  {func(c *Config) { c.Span = 1 }, "does not slide"},
		"hold without sliding":  {func(c *Config) { c.Hold = 1 }, "does not slide"},
		"precision of one":      {func(c *Config) { c.Precision = 1 }, "filter.precision is 1;"},
		"a budget of all":       {func(c *Config) { c.Budget = 1 }, ""},
		"a share of the window": {func(c *Config) { c.Retrain = Every{Share: 1} }, ""},
		"sliding, span, hold":   {func(c *Config) { c.Sliding, c.Span, c.Hold = true, 1, 1 }, ""},
	} {
		k := Default()
		c.change(&k)
		err := k.Validate()
		if (err == nil) != (c.word == "") || err != nil && !strings.Contains(err.Error(), c.word) {
			t.Errorf("%s: %v, want %q", name, err, c.word)
		}
	}
}

func TestDefaultsOfTheWindowAreItsOwn(t *testing.T) {
	c, w := Default(), window.Default()
	if c.Records != w.Records || c.Bytes != w.Bytes || c.Span != w.Span || c.Seed != w.Seed {
		t.Errorf("%+v, window %+v", c, w)
	}
}

func TestNamesUsersMeet(t *testing.T) {
	if Observe.String() != "observe" || Divert.String() != "divert" {
		t.Error(Observe, Divert)
	}
	for v, want := range map[Verdict]string{Pass: "pass", Suspect: "suspect", Quarantine: "quarantine", Unscored: "unscored"} {
		if v.String() != want {
			t.Errorf("%v, want %s", v, want)
		}
	}
}
