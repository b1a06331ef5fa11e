package cut

import (
	"bytes"
	"encoding/csv"
	"errors"
	"fmt"
	"io"
	"math/rand/v2"
	"reflect"
	"strings"
	"testing"
)

// rowsOf cuts all of b; cells of a row with a fault are its first line's text behind "fault N:".
func rowsOf(b []byte, delimiter byte) (rows [][]string, fault bool) {
	var r Row
	for len(b) > 0 {
		if !r.Cut(b, delimiter, 1<<20, true) {
			panic("a row without an end at the file's end")
		}
		var row []string
		if r.Fault != None {
			fault = true
			row = []string{fmt.Sprintf("fault %d: %s", r.Fault, b[:r.Text])}
		} else if r.Text > 0 {
			for _, c := range r.Cells {
				s := string(b[c.Lo:c.Hi])
				if c.Doubled {
					s = strings.ReplaceAll(s, `""`, `"`)
				}
				row = append(row, s)
			}
		}
		if row != nil {
			rows = append(rows, row)
		}
		b = b[r.Next:]
	}
	return rows, fault
}

func TestCells(t *testing.T) {
	for _, c := range []struct {
		name, text string
		want       [][]string
	}{
		{"plain", "a,b\n1,2\n", [][]string{{"a", "b"}, {"1", "2"}}},
		{"no end of line at the end", "a,b", [][]string{{"a", "b"}}},
		{"CR LF", "a,b\r\n1,2\r\n", [][]string{{"a", "b"}, {"1", "2"}}},
		{"empty cells", ",\n,,\n", [][]string{{"", ""}, {"", "", ""}}},
		{"empty quoted cell", `"",""`, [][]string{{"", ""}}},
		{"delimiter, quote and line end in quotes", "\"a,b\",\"c\"\"d\",\"e\nf\r\ng\"\r\nx", [][]string{{"a,b", `c"d`, "e\nf\r\ng"}, {"x"}}},
		{"quotes inside a plain cell", `5" nail,a "b" c`, [][]string{{`5" nail`, `a "b" c`}}},
		{"CR inside a plain cell", "a\rb,\rc\n", [][]string{{"a\rb", "\rc"}}},
		{"blank lines", "\n\r\na\n\n", [][]string{{"a"}}},
		{"text behind a quote", "\"a\"x,y\nb,c\n", [][]string{{"fault 2: \"a\"x,y"}, {"b", "c"}}},
		{"a quote not closed costs one line", "a,\"b\nc,d\ne,f\n", [][]string{{"fault 1: a,\"b"}, {"c", "d"}, {"e", "f"}}},
		{"a stray quote meets the next", "a,\"b\nc,\"d\"\n", [][]string{{"fault 2: a,\"b"}, {"c", "d"}}},
		{"delimiter at the file's end", `"a",`, [][]string{{"a", ""}}},
		{"cells longer than eight bytes", "abcdefgh,abcdefghi,0123456789012345\n", [][]string{{"abcdefgh", "abcdefghi", "0123456789012345"}}},
	} {
		t.Run(c.name, func(t *testing.T) {
			if got, _ := rowsOf([]byte(c.text), ','); !reflect.DeepEqual(got, c.want) {
				t.Errorf("got %q, want %q", got, c.want)
			}
		})
	}
}

func TestPlaces(t *testing.T) {
	b := []byte("\"a\n\nb\",c,d\r\nrest")
	var r Row
	if !r.Cut(b, ',', 2, false) || r.Lines != 3 || r.Text != 10 || r.Next != 12 || r.Count != 3 || len(r.Cells) != 2 {
		t.Errorf("got %+v", r)
	}
	b = []byte("a,b,\"c\"d\r\nrest")
	if !r.Cut(b, ',', 9, false) || r.Fault != AfterQuote || r.Column != 2 || r.Text != 8 || r.Next != 10 || r.Lines != 1 {
		t.Errorf("got %+v", r)
	}
}

// compare holds the cutter against encoding/csv, which is stricter with quotes in plain cells unless it is told to be
// lazy, and makes CR LF inside of quotes LF.
func compare(t *testing.T, b []byte, delimiter byte) {
	t.Helper()
	read := func(lazy bool) ([][]string, error) {
		r := csv.NewReader(bytes.NewReader(b))
		r.Comma, r.FieldsPerRecord, r.LazyQuotes = rune(delimiter), -1, lazy
		return r.ReadAll()
	}
	got, fault := rowsOf(b, delimiter)
	strict, err := read(false)
	if fault {
		if err == nil {
			t.Fatalf("%q: a fault where encoding/csv reads %q", b, strict)
		}
		return
	}
	for _, row := range got {
		for i := range row {
			row[i] = strings.ReplaceAll(row[i], "\r\n", "\n")
		}
	}
	want := strict
	if err != nil {
		if !errors.Is(err, csv.ErrBareQuote) {
			t.Fatalf("%q: no fault where encoding/csv has %v", b, err)
		}
		if want, err = read(true); err != nil {
			t.Fatal(err)
		}
	}
	if len(got)+len(want) > 0 && !reflect.DeepEqual(got, want) {
		t.Fatalf("%q: got %q, encoding/csv %q", b, got, want)
	}
}

// cutAnywhere checks that bytes coming later change nothing.
func cutAnywhere(t *testing.T, b []byte, delimiter byte) {
	t.Helper()
	var whole, part Row
	whole.Cut(b, delimiter, 100, true)
	for n := 1; n < len(b); n++ {
		if part.Cut(b[:n], delimiter, 100, false) {
			if part.Fault == None && (part.Next != whole.Next || part.Text != whole.Text || part.Lines != whole.Lines || !reflect.DeepEqual(part.Cells, whole.Cells)) || part.Fault != whole.Fault {
				t.Fatalf("%q: %+v of %d bytes, %+v of all", b, part, n, whole)
			}
		}
	}
}

func random(r *rand.Rand) []byte {
	const letters = "ab,;\"\"\n\r\"\"1,\n "
	b := make([]byte, r.IntN(40))
	for i := range b {
		b[i] = letters[r.IntN(len(letters))]
	}
	return b
}

// The reference is the standard library's encoding/csv.
func TestRowsAreThoseOfEncodingCSV(t *testing.T) {
	r := rand.New(rand.NewPCG(1, 2))
	for range 100_000 {
		b := random(r)
		compare(t, b, ",;"[r.IntN(2)])
		if len(b) > 0 {
			cutAnywhere(t, b, ',')
		}
	}
}

func FuzzCut(f *testing.F) {
	for _, s := range []string{"a,b\n1,2\n", "\"a\"\"b\",\"c\r\nd\"\r\n", "\"a\"x\n\"", "a\r", "\"a\"\r", ",,\n\n\"\""} {
		f.Add([]byte(s), byte(','))
	}
	f.Fuzz(func(t *testing.T, b []byte, delimiter byte) {
		switch delimiter {
		case ',', ';', '\t', '|':
		default:
			delimiter = ','
		}
		compare(t, b, delimiter)
		if len(b) > 0 && len(b) < 200 {
			cutAnywhere(t, b, delimiter)
		}
	})
}

func TestCuttingAllocatesNothing(t *testing.T) {
	b := []byte("12.5,\"Gala\",\"a \"\"b\"\"\",x\r\n")
	var r Row
	r.Cut(b, ',', 100, true)
	if n := testing.AllocsPerRun(100, func() { r.Cut(b, ',', 100, true) }); n != 0 {
		t.Errorf("%v allocations a row", n)
	}
}

// wide is 10,000 rows of 20 numbers and a label.
func wide() []byte {
	r := rand.New(rand.NewPCG(3, 4))
	var b []byte
	for range 10_000 {
		for range 20 {
			b = fmt.Appendf(b, "%.4f,", 100*r.Float64())
		}
		b = append(b, "extra\n"...)
	}
	return b
}

func BenchmarkCut(b *testing.B) {
	text := wide()
	b.SetBytes(int64(len(text)))
	var r Row
	for b.Loop() {
		for at := 0; at < len(text); at += r.Next {
			r.Cut(text[at:], ',', 100, true)
		}
	}
}

func BenchmarkEncodingCSV(b *testing.B) {
	text := wide()
	b.SetBytes(int64(len(text)))
	for b.Loop() {
		r := csv.NewReader(bytes.NewReader(text))
		r.ReuseRecord = true
		for {
			if _, err := r.Read(); err == io.EOF {
				break
			} else if err != nil {
				b.Fatal(err)
			}
		}
	}
}
