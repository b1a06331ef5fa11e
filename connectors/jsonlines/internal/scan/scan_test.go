package scan

import (
	"bytes"
	"encoding/json"
	"fmt"
	"math"
	"math/rand/v2"
	"reflect"
	"strings"
	"testing"
	"unicode/utf8"
)

var usual = Limits{Depth: 64, Members: 1000}

func TestMembers(t *testing.T) {
	b := []byte(` {"a":1, "b\n" : "x\"y","c":[1,{"d":null}],"e":{},"f":true,"g":null,"h":-1.5e+3} ` + "\r")
	var l Line
	if f := l.Scan(b, usual); f.What != "" {
		t.Fatal(f)
	}
	var got []string
	for _, m := range l.Members {
		got = append(got, fmt.Sprintf("%s %d %s", b[m.Key.Lo:m.Key.Hi], m.Kind, b[m.Value.Lo:m.Value.Hi]))
	}
	want := []string{"a 2 1", `b\n 3 x\"y`, `c 4 [1,{"d":null}]`, "e 5 {}", "f 1 true", "g 0 null", "h 2 -1.5e+3"}
	if !reflect.DeepEqual(got, want) {
		t.Errorf("got %q, want %q", got, want)
	}
}

func TestFaults(t *testing.T) {
	deep := strings.Repeat("[", 64)
	for _, c := range []struct {
		text string
		want Fault
	}{
		{"", Fault{"the line ends too early", 0}},
		{`{"a":1`, Fault{"the line ends too early", 6}},
		{`{"a`, Fault{"the line ends too early", 3}},
		{`{"a":1}}`, Fault{"something stands behind the object", 7}},
		{`[1]`, Fault{"the line is no object", 0}},
		{`12`, Fault{"the line is no object", 0}},
		{`{a:1}`, Fault{"a name in quotes should stand here", 1}},
		{`{"a":1,}`, Fault{"a name in quotes should stand here", 7}},
		{`{"a" 1}`, Fault{"a colon should stand here", 5}},
		{`{"a":1 "b":2}`, Fault{"a comma or closing brace should stand here", 7}},
		{`{"a":[1 2]}`, Fault{"a comma or closing bracket should stand here", 8}},
		{`{"a":NaN}`, Fault{"no value begins like this", 5}},
		{`{"a":nul}`, Fault{"no value begins like this", 8}},
		{`{"a":01}`, Fault{"a comma or closing brace should stand here", 6}},
		{`{"a":-}`, Fault{"a digit should stand here", 6}},
		{`{"a":1.}`, Fault{"a digit should stand here", 7}},
		{`{"a":"\x"}`, Fault{"no escape begins like this", 6}},
		{`{"a":"\u12g4"}`, Fault{"four hexadecimal digits should stand here", 10}},
		{"{\"a\":\"\t\"}", Fault{"a control character stands in a string", 6}},
		{"{\"a\":\"\xff\"}", Fault{"the bytes are not UTF-8 text", 6}},
		{`{"a":` + deep, Fault{"objects and arrays lie too deep in each other", 5 + 63}},
		{`{"a":1,"b":2,"c":3}`, Fault{"the object has too many members", 14}},
	} {
		var l Line
		limits := usual
		if strings.Contains(c.want.What, "too many") {
			limits.Members = 2
		}
		if got := l.Scan([]byte(c.text), limits); got != c.want {
			t.Errorf("%s: got %v, want %v", c.text, got, c.want)
		}
	}
}

// compare holds the scanner against encoding/json, which lets bytes through that are not UTF-8.
func compare(t *testing.T, b []byte) {
	t.Helper()
	var l Line
	f := l.Scan(b, Limits{Depth: 5000, Members: 5000})
	var want map[string]json.RawMessage
	err := json.Unmarshal(b, &want)
	if ok := err == nil && want != nil && utf8.Valid(b); ok != (f.What == "") {
		t.Fatalf("%q: fault %v where encoding/json has %v", b, f, err)
	}
	if f.At < 0 || f.At > len(b) {
		t.Fatalf("%q: fault at %d", b, f.At)
	}
	if f.What != "" {
		return
	}
	got := map[string]json.RawMessage{}
	for _, m := range l.Members {
		value := b[m.Value.Lo:m.Value.Hi]
		if m.Kind == String {
			value = b[m.Value.Lo-1 : m.Value.Hi+1]
			var s string
			if err := json.Unmarshal(value, &s); err != nil || s != string(textOf(b, m.Value)) {
				t.Fatalf("%q: string %q, want %q", b, textOf(b, m.Value), s)
			}
		}
		got[string(textOf(b, m.Key))] = value
		if m.Kind == Array {
			compareNumbers(t, value)
		}
	}
	if len(got)+len(want) > 0 && !reflect.DeepEqual(got, want) {
		t.Fatalf("%q: got %q, want %q", b, got, want)
	}
}

func textOf(b []byte, p Place) []byte {
	if p.Escaped {
		return Unescape(nil, b[p.Lo:p.Hi])
	}
	return b[p.Lo:p.Hi]
}

func compareNumbers(t *testing.T, b []byte) {
	t.Helper()
	var want []*float64
	err := json.Unmarshal(b, &want)
	got, ok := Numbers(nil, b, math.Inf(1), 1000)
	if ok != (err == nil) || ok && len(got) != len(want) {
		t.Fatalf("%q: got %v, %v, want %v", b, got, ok, err)
	}
	for i := range want {
		if ok && (want[i] == nil) != math.IsInf(got[i], 1) || ok && want[i] != nil && *want[i] != got[i] {
			t.Fatalf("%q: got %v", b, got)
		}
	}
}

// random is text that is nearly JSON.
func random(r *rand.Rand) []byte {
	b := appendValue(nil, r, 3, true)
	for range r.IntN(3) {
		if i := r.IntN(len(b)); r.IntN(2) == 0 {
			b[i] = `{}[]",:\u0e-. tfn`[r.IntN(17)]
		} else {
			b = append(b[:i], b[i+r.IntN(len(b)-i):]...)
		}
		if len(b) == 0 {
			return b
		}
	}
	return b
}

func appendValue(b []byte, r *rand.Rand, depth int, object bool) []byte {
	kind := r.IntN(7)
	if depth == 0 {
		kind = r.IntN(5)
	}
	if object {
		kind = 6
	}
	switch kind {
	case 0:
		return append(b, []string{"null", "true", "false"}[r.IntN(3)]...)
	case 1, 2:
		return append(b, []string{"0", "-1.5", "1e5", "12E-3", "1e400", "9007199254740993"}[r.IntN(6)]...)
	case 3, 4:
		return append(b, []string{`"Gala"`, `""`, `"a\"\\\/\b\f\n\r\t"`, `"\u00e4\ud83d\ude00"`, `"\ud800x"`, `"Äpfel und Birnen"`, `"\ud83d\u0041"`}[r.IntN(7)]...)
	case 5:
		b = append(b, '[')
		for i := range r.IntN(4) {
			if i > 0 {
				b = append(b, ", "[:1+r.IntN(2)]...)
			}
			b = appendValue(b, r, depth-1, false)
		}
		return append(b, ']')
	}
	b = append(b, '{')
	for i := range r.IntN(5) {
		if i > 0 {
			b = append(b, ", "[:1+r.IntN(2)]...)
		}
		b = append(b, []string{`"a":`, `"b" : `, `"\u0061":`, `"":`}[r.IntN(4)]...)
		b = appendValue(b, r, depth-1, false)
	}
	return append(b, '}')
}

// The reference is the standard library's encoding/json.
func TestLinesAreThoseOfEncodingJSON(t *testing.T) {
	r := rand.New(rand.NewPCG(1, 2))
	for range 100_000 {
		compare(t, random(r))
	}
}

func FuzzScan(f *testing.F) {
	for _, s := range []string{`{"a":1}`, `{"a":"x\u00e4\ud83d\ude00","b":[1,null,-2.5e3],"c":{"d":[[]]}} `, `[1]`, `{"a":tru`, "{\"a\":\"\xff\"}"} {
		f.Add([]byte(s))
	}
	f.Fuzz(func(t *testing.T, b []byte) {
		if bytes.Count(b, []byte("["))+bytes.Count(b, []byte("{")) < 4000 {
			compare(t, b)
		}
	})
}

func TestScanningAllocatesNothing(t *testing.T) {
	b := []byte(`{"grade":"Gala","size":[1.5,2,3],"note":{"by":"x"}}`)
	var l Line
	l.Scan(b, usual)
	nums := make([]float64, 0, 10)
	if n := testing.AllocsPerRun(100, func() { l.Scan(b, usual); Numbers(nums, b[23:32], 0, 3) }); n != 0 {
		t.Errorf("%v allocations a line", n)
	}
}

func TestArraysOfTooManyNumbersAreNotRead(t *testing.T) {
	for most, want := range []bool{false, false, true, true} {
		if _, ok := Numbers(nil, []byte("[1, 2]"), 0, most); ok != want {
			t.Errorf("at most %d: %v", most, ok)
		}
	}
}

func BenchmarkScan(b *testing.B) {
	line := []byte(`{"grade":"extra","grader":"Ines","graded_at":"2026-05-01T07:30:00Z","diameter_mm":71.52,"mass_g":182.4,"red_share":0.71,"bruises":0,"firmness":7.25}`)
	b.SetBytes(int64(len(line)))
	var l Line
	for b.Loop() {
		l.Scan(line, usual)
	}
}
