package connectors

import (
	"errors"
	"fmt"
	"math/rand/v2"
	"os"
	"path/filepath"
	"runtime"
	"runtime/debug"
	"strconv"
	"strings"
	"testing"
	"time"

	"labelweir/connectors/table"
)

// What one damaged file of some kilobytes may take. Allocated is all memory asked for, most of it free again long
// before; a buffer that claims to unpack to less than a gigabyte is unpacked.
const (
	mostTime  = 10 * time.Second
	mostAsked = 4 << 30
)

// damagedInputs is how many inputs TestDamaged makes: a sample, or with LABELWEIR_LONG=1 what is promised, or the
// variable's number.
func damagedInputs() int {
	switch v := os.Getenv("LABELWEIR_LONG"); v {
	case "":
		return 700
	case "1":
		return 12_000
	default:
		n, _ := strconv.Atoi(v)
		return n
	}
}

// damaged is one damaged input.
type damaged struct {
	base  base
	harm  string
	bytes []byte
}

// damage gives input n of the run, always the same: bases take turns, and for each of them the ways to damage it.
func damage(all []base, n int) damaged {
	r := rand.New(rand.NewPCG(17, uint64(n)))
	b, other := all[n%len(all)], all[r.IntN(len(all))]
	ways := harms()
	switch {
	case strings.Contains(b.name, ".arrow"):
		ways = append(ways, arrowHarms()...)
		if r.IntN(3) > 0 { // most often one of the same format
			other = all[r.IntN(len(all))/2]
		}
	case !strings.HasSuffix(b.name, ".parquet"):
		ways = append(ways, textHarms()...)
	}
	h := ways[n/len(all)%len(ways)]
	return damaged{b, h.name, h.do(r, b.bytes, other.bytes)}
}

// outcome counts what became of the inputs of one base.
type outcome struct {
	inputs, whole, errors, place, column int
	slowest                              time.Duration
	asked                                uint64
}

// TestDamaged reads thousands of damaged files, made from a seed, and writes out what can be read. Every one of them is
// copied whole or ends in an error about the input, that names the file and, beyond its head, the place in it; there is
// no panic, no output left half written, and neither much time nor much memory is spent on a small file. Run all with
//
//	LABELWEIR_LONG=1 go test ./connectors -run TestDamaged -v -timeout 30m
func TestDamaged(t *testing.T) {
	all := bases(t)
	in, out := filepath.Join(t.TempDir(), "in"), t.TempDir()
	results := map[string]*outcome{}
	total := damagedInputs()
	for n := 0; n < total; n++ {
		d := damage(all, n)
		if d.base.nested {
			continue // belongs to TestDamagedAtTheCommand
		}
		o := results[d.base.name]
		if o == nil {
			o = &outcome{}
			results[d.base.name] = o
		}
		path := in + filepath.Ext(d.base.name)
		if err := os.WriteFile(path, d.bytes, 0o666); err != nil {
			t.Fatal(err)
		}
		if fault := o.survive(d, path, filepath.Join(out, "out"+filepath.Ext(d.base.name))); fault != "" {
			t.Errorf("input %d, %s, %s: %s", n, d.base.name, d.harm, fault)
		}
	}
	sum := outcome{}
	for _, b := range all {
		if o := results[b.name]; o != nil {
			t.Logf("%-20s %s", b.name, o)
			sum.add(o)
		}
	}
	t.Logf("%-20s %s", "all", &sum)
	if sum.errors < sum.inputs/2 {
		t.Errorf("only %d of %d damaged inputs were noticed", sum.errors, sum.inputs)
	}
}

func (o *outcome) String() string {
	return fmt.Sprintf("%5d inputs, %5d copied, %5d errors: %5d name the place, %5d the column; slowest %4d ms, most memory asked for %5d MB",
		o.inputs, o.whole, o.errors, o.place, o.column, o.slowest.Milliseconds(), o.asked>>20)
}

func (o *outcome) add(p *outcome) {
	o.inputs, o.whole, o.errors, o.place, o.column = o.inputs+p.inputs, o.whole+p.whole, o.errors+p.errors, o.place+p.place, o.column+p.column
	o.slowest, o.asked = max(o.slowest, p.slowest), max(o.asked, p.asked)
}

// survive carries one input and says what was wrong about how that went.
func (o *outcome) survive(d damaged, in, out string) (fault string) {
	o.inputs++
	alarm := time.AfterFunc(mostTime, func() { panic(fmt.Sprintf("%s, %s: no end after %v", d.base.name, d.harm, mostTime)) })
	defer alarm.Stop()
	var before, after runtime.MemStats
	runtime.ReadMemStats(&before)
	began := time.Now()
	var rows []table.Unreadable
	trace, err := fenced(func() error {
		return carry(in, d.base.label, out, func(u table.Unreadable) error { rows = append(rows, u); return nil })
	})
	o.slowest = max(o.slowest, time.Since(began))
	runtime.ReadMemStats(&after)
	asked := after.TotalAlloc - before.TotalAlloc
	o.asked = max(o.asked, asked)
	var faults []string
	if trace != "" {
		return trace
	}
	if asked > mostAsked {
		faults = append(faults, fmt.Sprintf("%d MB were asked for", asked>>20))
	}
	for _, u := range rows {
		if u.File != in || u.Line < 1 || u.Reason == "" {
			faults = append(faults, fmt.Sprintf("an unreadable row without file, line or reason: %+v", u))
			break
		}
	}
	return strings.Join(append(faults, o.judge(err, d, in, out)...), "; ")
}

// judge looks at the error and at what is left.
func (o *outcome) judge(err error, d damaged, in, out string) (faults []string) {
	left, _ := filepath.Glob(filepath.Join(filepath.Dir(out), ".*"))
	if len(left) > 0 {
		faults = append(faults, fmt.Sprintf("left half written: %v", left))
	}
	_, missing := os.Stat(out)
	if err == nil {
		o.whole++
		// What was written must be read again without a fault.
		trace, again := fenced(func() error { return reread(out, d.base.label) })
		if missing != nil || again != nil || trace != "" {
			faults = append(faults, fmt.Sprintf("copied, but the output is not well formed: %v %v %s", missing, again, trace))
		}
		os.Remove(out)
		return faults
	}
	o.errors++
	var own *table.Error
	switch {
	case !errors.As(err, &own):
		return append(faults, fmt.Sprintf("%T is no *table.Error: %v", err, err))
	case own.Path != in || own.What == "":
		faults = append(faults, fmt.Sprintf("the message does not name the file or what is wrong: %v", err))
	case !errors.Is(err, table.ErrUnreadable) && !errors.Is(err, table.ErrColumn):
		faults = append(faults, fmt.Sprintf("not an error about the input: %v", err))
	case missing == nil:
		faults = append(faults, "an error, but the output stands there")
	}
	if own.Batch > 0 || own.Group > 0 || own.Line > 0 {
		o.place++
	}
	if own.Column != "" {
		o.column++
	}
	return faults
}

// fenced runs do; trace tells of a panic.
func fenced(do func() error) (trace string, err error) {
	defer func() {
		if p := recover(); p != nil {
			trace = fmt.Sprintf("panic: %v\n%s", p, debug.Stack())
		}
	}()
	return "", do()
}
