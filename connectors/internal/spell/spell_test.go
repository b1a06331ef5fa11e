package spell

import (
	"encoding/json"
	"math"
	"math/big"
	"math/rand/v2"
	"strconv"
	"strings"
	"testing"
	"time"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
	"github.com/apache/arrow/go/v16/arrow/decimal128"
	"github.com/apache/arrow/go/v16/arrow/memory"

	"labelweir/connectors/internal/half"
	"labelweir/connectors/table"
)

// from makes an array from JSON, as arrow/go reads it.
func from(t *testing.T, dt arrow.DataType, text string) arrow.Array {
	t.Helper()
	arr, _, err := array.FromJSON(memory.DefaultAllocator, dt, strings.NewReader(text))
	if err != nil {
		t.Fatalf("%s: %v", dt, err)
	}
	return arr
}

// spelled joins all values of an array; null is ~ in plain text.
func spelled(t *testing.T, arr arrow.Array, asJSON bool) string {
	t.Helper()
	make := Plain
	if asJSON {
		make = JSON
	}
	s, err := make(arr)
	if err != nil {
		t.Fatal(err)
	}
	var out []string
	for i := range arr.Len() {
		b, null := s(nil, i)
		if null && !asJSON {
			b = append(b, '~')
		}
		out = append(out, string(b))
	}
	return strings.Join(out, " ")
}

func TestValues(t *testing.T) {
	words := &arrow.DictionaryType{IndexType: arrow.PrimitiveTypes.Int8, ValueType: arrow.BinaryTypes.String}
	point := arrow.StructOf(arrow.Field{Name: "x", Type: arrow.PrimitiveTypes.Int32, Nullable: true}, arrow.Field{Name: `"y"`, Type: arrow.BinaryTypes.String, Nullable: true})
	for _, c := range []struct {
		dt                arrow.DataType
		text, plain, json string
	}{
		{arrow.FixedWidthTypes.Boolean, `[true, false, null]`, `true false ~`, `true false null`},
		{arrow.PrimitiveTypes.Int8, `[-128, 127, null]`, `-128 127 ~`, `-128 127 null`},
		{arrow.PrimitiveTypes.Uint64, `[0, 200]`, `0 200`, `0 200`},
		{arrow.PrimitiveTypes.Int64, `[-9223372036854775808]`, `-9223372036854775808`, `-9223372036854775808`},
		{arrow.PrimitiveTypes.Float64, `[0.1, 1e16, 1e-7, 100, -0.0]`, `0.1 1e+16 1e-07 100 -0.0`, `0.1 1e+16 1e-07 100 -0.0`},
		{arrow.BinaryTypes.String, `["Gala", "", null, "a\"b\n"]`, "Gala  ~ a\"b\n", `"Gala" "" null "a\"b\n"`},
		{arrow.BinaryTypes.Binary, `["AAH/", null]`, `AAH/ ~`, `"AAH/" null`},
		{words, `["Gala", null, "Fuji"]`, `Gala ~ Fuji`, `"Gala" null "Fuji"`},
		{arrow.FixedWidthTypes.Date32, `["2026-05-01", "1899-12-31"]`, `2026-05-01 1899-12-31`, `"2026-05-01" "1899-12-31"`},
		{arrow.FixedWidthTypes.Time32ms, `["07:30:00.250"]`, `07:30:00.25`, `"07:30:00.25"`},
		{&arrow.TimestampType{Unit: arrow.Microsecond}, `["2026-05-01T07:30:00.25"]`, `2026-05-01T07:30:00.25`, `"2026-05-01T07:30:00.25"`},
		{&arrow.TimestampType{Unit: arrow.Second, TimeZone: "UTC"}, `["2026-05-01T07:30:00", "1969-12-31T23:59:59"]`, `2026-05-01T07:30:00Z 1969-12-31T23:59:59Z`, `"2026-05-01T07:30:00Z" "1969-12-31T23:59:59Z"`},
		{&arrow.TimestampType{Unit: arrow.Nanosecond, TimeZone: "+02:00"}, `["1969-12-31T23:59:59.999999999"]`, `1970-01-01T01:59:59.999999999+02:00`, `"1970-01-01T01:59:59.999999999+02:00"`},
		{arrow.FixedWidthTypes.Duration_ms, `[1500]`, `1500`, `1500`},
		{arrow.FixedSizeListOf(2, arrow.PrimitiveTypes.Float32), `[[0.1, null], null]`, `[0.1,null] ~`, `[0.1,null] null`},
		{arrow.ListOf(arrow.BinaryTypes.String), `[["a", "b"], [], null]`, `["a","b"] [] ~`, `["a","b"] [] null`},
		{point, `[{"x": 1, "\"y\"": "a"}, null]`, `{"x":1,"\"y\"":"a"} ~`, `{"x":1,"\"y\"":"a"} null`},
		{arrow.MapOf(arrow.BinaryTypes.String, arrow.PrimitiveTypes.Int64), `[[{"key": "a", "value": 1}, {"key": "b", "value": null}]]`,
			`[{"key":"a","value":1},{"key":"b","value":null}]`, `[{"key":"a","value":1},{"key":"b","value":null}]`},
		{arrow.Null, `[null]`, `~`, `null`},
	} {
		arr := from(t, c.dt, c.text)
		if got := spelled(t, arr, false); got != c.plain {
			t.Errorf("%s: got %s, want %s", c.dt, got, c.plain)
		}
		if got := spelled(t, arr, true); got != c.json {
			t.Errorf("%s: got %s, want %s", c.dt, got, c.json)
		}
		if n := int64(arr.Len()); n > 1 {
			rest := array.NewSlice(arr, 1, n)
			if _, want, _ := strings.Cut(c.json, " "); c.dt.ID() != arrow.STRUCT && spelled(t, rest, true) != want {
				t.Errorf("%s: a slice gives %s, want %s", c.dt, spelled(t, rest, true), want)
			}
		}
	}
}

// Every moment that has a text is the one that the text means, in any zone; the others stay counts.
func TestMomentsReadBackTheSame(t *testing.T) {
	r := rand.New(rand.NewPCG(5, 6))
	for _, zone := range []string{"UTC", "Europe/Berlin", "-09:30", "Africa/Monrovia", "no/where"} {
		for _, unit := range []arrow.TimeUnit{arrow.Second, arrow.Millisecond, arrow.Microsecond, arrow.Nanosecond} {
			b := array.NewTimestampBuilder(memory.DefaultAllocator, &arrow.TimestampType{Unit: unit, TimeZone: zone})
			for range 500 {
				b.Append(arrow.Timestamp(int64(r.Uint64()) >> r.IntN(40)))
			}
			arr := b.NewArray().(*array.Timestamp)
			s, err := Plain(arr)
			if err != nil {
				t.Fatal(err)
			}
			for i := range arr.Len() {
				text, _ := s(nil, i)
				count := int64(arr.Value(i))
				if n, err := strconv.ParseInt(string(text), 10, 64); err == nil {
					if year := time.Unix(count/int64(time.Second/unit.Multiplier()), 0).UTC().Year(); n != count || year > 0 && year < 9999 {
						t.Fatalf("%d %s: got %s in year %d", count, unit, text, year)
					}
					continue
				}
				back, err := time.Parse(time.RFC3339Nano, string(text))
				if err != nil || !back.Equal(arr.Value(i).ToTime(unit)) {
					t.Fatalf("%d %s in %s: got %s, %v", count, unit, zone, text, err)
				}
			}
		}
	}
}

func TestWhatIsNoFiniteNumber(t *testing.T) {
	b := array.NewFloat32Builder(memory.DefaultAllocator)
	b.AppendValues([]float32{float32(math.NaN()), float32(math.Inf(1)), float32(math.Inf(-1))}, nil)
	arr := b.NewArray()
	if got := spelled(t, arr, false); got != "NaN inf -inf" {
		t.Errorf("got %s", got)
	}
	if got := spelled(t, arr, true); got != "null null null" {
		t.Errorf("got %s", got)
	}
}

// The references are strconv and math/big of the standard library.
func TestNumbersReadBackTheSame(t *testing.T) {
	r := rand.New(rand.NewPCG(1, 2))
	for range 50_000 {
		if v := math.Float64frombits(r.Uint64()); !math.IsNaN(v) && !math.IsInf(v, 0) {
			b, _ := Float(nil, v, 64, true)
			if back, err := strconv.ParseFloat(string(b), 64); err != nil || math.Float64bits(back) != math.Float64bits(v) || !isNumber(b) {
				t.Fatalf("%v: %s", v, b)
			}
		}
		n, scale := decimal128.New(r.Int64()-math.MaxInt64/2, r.Uint64()>>(r.IntN(64))), r.IntN(12)
		want := new(big.Rat).SetFrac(n.BigInt(), new(big.Int).Exp(big.NewInt(10), big.NewInt(int64(scale)), nil)).FloatString(scale)
		if got := string(decimal(nil, n.BigInt(), scale)); got != want {
			t.Fatalf("got %s, want %s", got, want)
		}
	}
	if got := string(decimal(nil, big.NewInt(-12), -3)); got != "-12000" {
		t.Errorf("got %s", got)
	}
}

// Every number of 16 bits is nearer to its text than its neighbours are, and the text is short.
func TestHalvesReadBackTheSame(t *testing.T) {
	for bits := range 1 << 16 {
		v := half.Value(uint16(bits))
		if math.IsNaN(v) || math.IsInf(v, 0) {
			continue
		}
		b, _ := binary16(nil, uint16(bits), true)
		back, err := strconv.ParseFloat(string(b), 64)
		if err != nil || math.Signbit(back) != math.Signbit(v) {
			t.Fatalf("%v: %s", v, b)
		}
		for _, other := range []int{bits - 1, bits + 1} {
			if other&0x7fff < 0x7c00 && other>>15 == bits>>15 && math.Abs(back-half.Value(uint16(other))) <= math.Abs(back-v) {
				t.Fatalf("%v: %s is nearer to %v", v, b, half.Value(uint16(other)))
			}
		}
		if digits := len(strings.Trim(strings.ReplaceAll(strings.TrimLeft(string(b), "-"), ".", ""), "0")); digits > 5 && !strings.Contains(string(b), "e") {
			t.Fatalf("%v: %s", v, b)
		}
	}
}

func TestLargestWholeNumber(t *testing.T) {
	b := array.NewUint64Builder(memory.DefaultAllocator)
	b.Append(math.MaxUint64)
	if got := spelled(t, b.NewArray(), true); got != "18446744073709551615" {
		t.Errorf("got %s", got)
	}
}

// The reference is encoding/json.
func TestStringsReadBackTheSame(t *testing.T) {
	r := rand.New(rand.NewPCG(3, 4))
	for range 20_000 {
		b := make([]byte, r.IntN(12))
		for i := range b {
			b[i] = byte(r.IntN(1 + r.IntN(256)))
		}
		want := strings.ToValidUTF8(string(b), "\ufffd")
		var got string
		if err := json.Unmarshal(AppendString(nil, string(b)), &got); err != nil || len(strings.ToValidUTF8(got, "")) != len(got) {
			t.Fatalf("%q: %v", b, err)
		}
		if strings.ReplaceAll(got, "\ufffd", "") != strings.ReplaceAll(want, "\ufffd", "") {
			t.Fatalf("%q: got %q, want %q", b, got, want)
		}
		if clean(b) != (string(b) == want && string(AppendString(nil, string(b))) == `"`+string(b)+`"`) {
			t.Fatalf("%q: clean is %v", b, clean(b))
		}
	}
}

func TestCellsBecomeJSONValuesOfTheirKind(t *testing.T) {
	for _, c := range []struct {
		means       arrow.DataType
		cells, want string
	}{
		{arrow.PrimitiveTypes.Int64, `["1", " 2", "+3", "NA", null, "007", "12345678901234567890"]`, `1 2 3 "NA" null 7 12345678901234567890`},
		{arrow.PrimitiveTypes.Float64, `["1.50", ".5", "1.", "nan", "1e400"]`, `1.50 0.5 1 "nan" "1e400"`},
		{arrow.FixedWidthTypes.Boolean, `["True", "false", "yes"]`, `true false "yes"`},
		{arrow.FixedWidthTypes.Timestamp_us, `["2026-05-01", "a\"b"]`, `"2026-05-01" "a\"b"`},
	} {
		store := from(t, arrow.BinaryTypes.String, c.cells)
		arr := array.NewExtensionArrayWithStorage(table.NewCellType(c.means), store)
		if got := spelled(t, arr, true); got != c.want {
			t.Errorf("%s: got %s, want %s", c.means, got, c.want)
		}
	}
}

func TestSpellingAllocatesNothing(t *testing.T) {
	for _, c := range []struct {
		dt   arrow.DataType
		text string
	}{
		{arrow.PrimitiveTypes.Float64, `[0.1234567]`}, {arrow.PrimitiveTypes.Int32, `[5]`}, {arrow.BinaryTypes.String, `["a\"b"]`},
		{&arrow.TimestampType{Unit: arrow.Second, TimeZone: "UTC"}, `["2026-05-01T07:30:00"]`},
		{arrow.ListOf(arrow.PrimitiveTypes.Int64), `[[1, 2, 3]]`},
	} {
		s, err := JSON(from(t, c.dt, c.text))
		if err != nil {
			t.Fatal(err)
		}
		buf := make([]byte, 0, 1000)
		if n := testing.AllocsPerRun(100, func() { s(buf, 0) }); n != 0 {
			t.Errorf("%s: %v allocations a value", c.dt, n)
		}
	}
}
