package config

import (
	"fmt"
	"math"
	"runtime"
	"strconv"
	"strings"
	"time"

	"labelweir/filter"
	"labelweir/model"
)

// none is written for a setting that is off.
const none = "none"

// leastRecords is the smallest window: fewer rows can't be trained on.
const leastRecords = model.MinRows

func parseName(s string) (string, error) {
	if strings.TrimSpace(s) == "" {
		return "", fmt.Errorf("is empty; write a name, or leave it out")
	}
	if strings.ContainsRune(s, 0) {
		return "", fmt.Errorf("holds a zero byte; no name does")
	}
	return s, nil
}

func formatName(s string) string { return s }

// parseCount reads a whole number of at least least.
func parseCount(least int) func(string) (int, error) {
	return func(s string) (int, error) {
		n, err := strconv.Atoi(s)
		if err != nil || n < least {
			return 0, fmt.Errorf("%q is not a whole number from %d on", s, least)
		}
		return n, nil
	}
}

func formatCount(n int) string { return strconv.Itoa(n) }

// parseShare reads a share in (0, 1], written as 5% or 0.05.
func parseShare(s string) (float64, error) {
	number, percent := strings.CutSuffix(s, "%")
	x, err := strconv.ParseFloat(strings.TrimSpace(number), 64)
	if percent {
		x /= 100
	}
	if err != nil || !(x > 0 && x <= 1) {
		return 0, fmt.Errorf("%q is not a share above 0 and up to 1; write it like 5%% or 0.05", s)
	}
	return x, nil
}

// formatShare writes the shortest form of x in percent.
func formatShare(x float64) string {
	return strconv.FormatFloat(math.Round(x*1e12)/1e10, 'f', -1, 64) + "%"
}

func parsePrecision(s string) (float64, error) {
	x, err := parseShare(s)
	if err != nil || !(x > 0.5 && x < 1) {
		return 0, fmt.Errorf("%q is not a share between 0.5 and 1; write it like 0.95", s)
	}
	return x, nil
}

func formatNumber(x float64) string { return strconv.FormatFloat(x, 'f', -1, 64) }

// parseGate reads a share or none, which is 0.
func parseGate(s string) (float64, error) {
	if s == none {
		return 0, nil
	}
	x, err := parseShare(s)
	if err != nil {
		return 0, fmt.Errorf("%w, or none", err)
	}
	return x, nil
}

func formatGate(x float64) string {
	if x == 0 {
		return none
	}
	return formatShare(x)
}

// parseSize reads a count of bytes with a binary (KiB, MiB, GiB, TiB) or decimal (kB, MB, GB, TB) unit, or B.
func parseSize(s string) (int64, error) {
	digits := strings.TrimRight(s, "BKMGTikb")
	unit, ok := sizeUnit(strings.TrimSpace(s[len(digits):]))
	n, err := strconv.ParseInt(strings.TrimSpace(digits), 10, 64)
	if err != nil || !ok || n < 1 || n > math.MaxInt64/unit {
		return 0, fmt.Errorf("%q is not a size; write it like 512MiB", s)
	}
	return n * unit, nil
}

// auto is written for a size that follows from others.
const auto = "auto"

// leastMemory is what the smallest sweep needs, and some room.
const leastMemory = 256 << 20

// parseMemory reads a size or auto, which is 0.
func parseMemory(s string) (int64, error) {
	if s == auto {
		return 0, nil
	}
	n, err := parseSize(s)
	if err != nil {
		return 0, fmt.Errorf("%w, or auto", err)
	}
	if n < leastMemory {
		return 0, fmt.Errorf("%q is too little for any sweep; write %s or more", s, formatSize(leastMemory))
	}
	return n, nil
}

func formatMemory(n int64) string {
	if n == 0 {
		return auto
	}
	return formatSize(n)
}

func sizeUnit(name string) (int64, bool) {
	switch name {
	case "B":
		return 1, true
	case "KiB":
		return 1 << 10, true
	case "MiB":
		return 1 << 20, true
	case "GiB":
		return 1 << 30, true
	case "TiB":
		return 1 << 40, true
	case "kB":
		return 1e3, true
	case "MB":
		return 1e6, true
	case "GB":
		return 1e9, true
	case "TB":
		return 1e12, true
	}
	return 1, false
}

// formatSize writes n with the largest binary unit that divides it.
func formatSize(n int64) string {
	unit := "B"
	for _, next := range []string{"KiB", "MiB", "GiB", "TiB"} {
		if n%1024 != 0 {
			break
		}
		n, unit = n/1024, next
	}
	return strconv.FormatInt(n, 10) + unit
}

// day and week are calendar units without daylight saving: exactly 24 hours, and seven of those.
const (
	day  = 24 * time.Hour
	week = 7 * day
)

// parseSpan reads a duration above zero like 7d, 2w, 36h or 1h30m, or none, which is 0.
func parseSpan(s string) (time.Duration, error) {
	if s == none {
		return 0, nil
	}
	for suffix, unit := range map[string]time.Duration{"d": day, "w": week} {
		digits, ok := strings.CutSuffix(s, suffix)
		if !ok {
			continue
		}
		x, err := strconv.ParseFloat(digits, 64)
		if err != nil || !(x > 0) || x > float64(math.MaxInt64)/float64(unit)/2 {
			return 0, fmt.Errorf("%q is not a span of time; write it like 7d, 36h, or none", s)
		}
		return time.Duration(x * float64(unit)), nil
	}
	d, err := time.ParseDuration(s)
	if err != nil || d <= 0 {
		return 0, fmt.Errorf("%q is not a span of time; write it like 7d, 36h, or none", s)
	}
	return d, nil
}

func formatSpan(d time.Duration) string {
	switch {
	case d == 0:
		return none
	case d%day == 0:
		return strconv.FormatInt(int64(d/day), 10) + "d"
	}
	text := d.String() // 36h0m0s
	if strings.HasSuffix(text, "m0s") {
		text = strings.TrimSuffix(text, "0s")
	}
	if strings.HasSuffix(text, "h0m") {
		text = strings.TrimSuffix(text, "0m")
	}
	return text
}

// parseEvery reads 5% (a share of the window) or 1000 (rows).
func parseEvery(s string) (filter.Every, error) {
	if strings.HasSuffix(s, "%") {
		x, err := parseShare(s)
		return filter.Every{Share: x}, err
	}
	n, err := strconv.Atoi(s)
	if err != nil || n < 1 {
		return filter.Every{}, fmt.Errorf("%q is neither a share of the window like 5%% nor a count of rows like 1000", s)
	}
	return filter.Every{Rows: n}, nil
}

func formatEvery(e filter.Every) string {
	if e.Rows > 0 {
		return strconv.Itoa(e.Rows)
	}
	return formatShare(e.Share)
}

func parseSeed(s string) (uint64, error) {
	n, err := strconv.ParseUint(s, 10, 64)
	if err != nil {
		return 0, fmt.Errorf("%q is not a whole number from 0 on", s)
	}
	return n, nil
}

func formatSeed(n uint64) string { return strconv.FormatUint(n, 10) }

// cores is written for as many workers as the machine has cores.
const cores = "cores"

func parseWorkers(s string) (int, error) {
	if s == cores {
		return runtime.NumCPU(), nil
	}
	n, err := parseCount(1)(s)
	if err != nil {
		return 0, fmt.Errorf("%w, or cores", err)
	}
	return n, nil
}

func formatWorkers(n int) string {
	if n == runtime.NumCPU() {
		return cores
	}
	return strconv.Itoa(n)
}

func parseMode(s string) (filter.Mode, error) {
	for _, m := range []filter.Mode{filter.Observe, filter.Divert} {
		if s == m.String() {
			return m, nil
		}
	}
	return 0, fmt.Errorf("%q is not a mode; write observe or divert", s)
}

func formatMode(m filter.Mode) string { return m.String() }

func parseSwitch(s string) (bool, error) {
	switch s {
	case "true":
		return true, nil
	case "false":
		return false, nil
	}
	return false, fmt.Errorf("%q is neither true nor false", s)
}

func formatSwitch(on bool) string { return strconv.FormatBool(on) }
