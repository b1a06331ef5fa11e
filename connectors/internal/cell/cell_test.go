package cell

import (
	"math"
	"math/rand/v2"
	"strconv"
	"testing"
	"time"
)

// The reference is the standard library's strconv.
func TestNumbersAreThoseOfStrconv(t *testing.T) {
	const letters = "0123456789+-.eE_xan "
	r := rand.New(rand.NewPCG(1, 2))
	for range 200_000 {
		b := make([]byte, 1+r.IntN(21))
		for i := range b {
			b[i] = letters[r.IntN(10+r.IntN(11))]
		}
		s := trimmed(string(b))
		v, err := strconv.ParseInt(s, 10, 64)
		if got, ok := Int(b); ok != (err == nil) || ok && got != v {
			t.Fatalf("%q: got %d, %v, want %d, %v", b, got, ok, v, err)
		}
		f, err := strconv.ParseFloat(s, 64)
		want := err == nil && !math.IsNaN(f) && !math.IsInf(f, 0) && !contains(s, "xX_")
		if got, ok := Number(b); ok != want || ok && math.Float64bits(got) != math.Float64bits(f) {
			t.Fatalf("%q: got %v, %v, want %v, %v", b, got, ok, f, want)
		}
	}
	for _, s := range []string{"9223372036854775807", "-9223372036854775808", "9223372036854775808", "-9223372036854775809"} {
		v, err := strconv.ParseInt(s, 10, 64)
		if got, ok := Int([]byte(s)); ok != (err == nil) || ok && got != v {
			t.Errorf("%s: got %d, %v", s, got, ok)
		}
	}
}

func trimmed(s string) string {
	for len(s) > 0 && s[0] == ' ' {
		s = s[1:]
	}
	for len(s) > 0 && s[len(s)-1] == ' ' {
		s = s[:len(s)-1]
	}
	return s
}

func contains(s, any string) bool {
	for i := range s {
		for j := range any {
			if s[i] == any[j] {
				return true
			}
		}
	}
	return false
}

// The reference is the standard library's time.
func TestMomentsAreThoseOfTime(t *testing.T) {
	layouts := []string{"2006-01-02", "2006-01-02T15:04", "2006-01-02 15:04:05", "2006-01-02T15:04:05.999999999", "2006-01-02T15:04:05.000",
		"2006-01-02T15:04:05Z07:00", "2006-01-02 15:04:05.999999-0700", "2006-01-02T15:04Z07"}
	styles := []Style{Date, Local, Local, Local, Local, Zoned, Zoned, Zoned}
	r := rand.New(rand.NewPCG(3, 4))
	for range 20_000 {
		k := r.IntN(len(layouts))
		zone := time.FixedZone("", 3600*(r.IntN(25)-12))
		text := time.Unix(r.Int64N(200e9)-60e9, r.Int64N(1e9)).In(zone).Format(layouts[k])
		want, err := time.Parse(layouts[k], text)
		if err != nil {
			continue // a year beyond 9999
		}
		seconds, nanos, _, style := Moment([]byte(text))
		if style != styles[k] || seconds != want.Unix() || int(nanos) != want.Nanosecond() {
			t.Fatalf("%q: got %d s %d ns in style %d, want %d s %d ns in style %d", text, seconds, nanos, style, want.Unix(), want.Nanosecond(), styles[k])
		}
	}
	for _, text := range []string{"", "2026", "2026-13-01", "2026-02-29", "2026-00-10", "2026-01-01T24:00", "2026-01-01T10:60", "2026-01-01T10:00:60",
		"2026-01-01T10:00:00.", "2026-01-01T10:00:00.1234567890", "2026-01-01T10:00:00+2", "2026-01-01T10:00:00+02:", "2026-01-01X10:00", "2026-01-01T", "2026-1-1", "2026-01-01T10:00Zx"} {
		if _, _, _, style := Moment([]byte(text)); style != NoMoment {
			t.Errorf("%q was read", text)
		}
	}
}

func TestGuesses(t *testing.T) {
	for _, c := range []struct {
		cells []string
		want  string
	}{
		{[]string{"1", " 2", "-3", "", "NA"}, "int64"},
		{[]string{"1", "2.5", "?"}, "float64"},
		{[]string{"1", "9223372036854775808"}, "float64"},
		{[]string{"1e3", "nan"}, "float64"},
		{[]string{"0071", "0102"}, "text"},
		{[]string{"0", "0.5", "-0"}, "float64"},
		{[]string{"true", "False", ""}, "bool"},
		{[]string{"true", "1"}, "text"},
		{[]string{"2026-05-01", "2026-05-02"}, "timestamp[us]"},
		{[]string{"2026-05-01T10:00:00Z", "2026-05-01T10:00:00.1234567+02:00"}, "timestamp[ns, tz=UTC]"},
		{[]string{"2026-05-01T10:00:00Z", "2026-05-01T10:00:00"}, "text"},
		{[]string{"Gala", "1"}, "text"},
		{[]string{"", "NA"}, "text"},
		{nil, "text"},
	} {
		var g Guess
		for _, s := range c.cells {
			g.Watch([]byte(s))
		}
		got := "text"
		if dt := g.Type(); dt != nil {
			got = dt.String()
		}
		if got != c.want {
			t.Errorf("%q: got %s, want %s", c.cells, got, c.want)
		}
	}
}

func TestReadingACellAllocatesNothing(t *testing.T) {
	number, moment := []byte("12.345678"), []byte("2026-05-01T10:00:00.25+02:00")
	var g Guess
	if n := testing.AllocsPerRun(100, func() { Number(number); Moment(moment); Bool(number); g.Watch(number); g.Watch(moment) }); n != 0 {
		t.Errorf("%v allocations", n)
	}
}

func BenchmarkNumber(b *testing.B) {
	number := []byte("71.5203")
	for b.Loop() {
		Number(number)
	}
}
