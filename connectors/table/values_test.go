package table

import (
	"fmt"
	"math"
	"testing"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
	"github.com/apache/arrow/go/v16/arrow/float16"
	"github.com/apache/arrow/go/v16/arrow/memory"

	"labelweir/filter"
	"labelweir/model"
)

func TestTimesAreNanosecondsOfUTC(t *testing.T) {
	// 2026-05-04 is day 20577; GNU date: date -ud @1777852800.
	const day = 20577 * 24 * 3600
	for _, x := range []struct {
		dt   arrow.DataType
		vals []int64
		want []int64
	}{
		{&arrow.TimestampType{Unit: arrow.Second}, []int64{day, 1 << 40}, []int64{day * 1e9, filter.NoTime}},
		{&arrow.TimestampType{Unit: arrow.Millisecond, TimeZone: "Asia/Tokyo"}, []int64{day * 1e3, -1}, []int64{day * 1e9, -1e6}},
		{&arrow.TimestampType{Unit: arrow.Microsecond}, []int64{day * 1e6, math.MinInt64}, []int64{day * 1e9, filter.NoTime}},
		{&arrow.TimestampType{Unit: arrow.Nanosecond}, []int64{day * 1e9, math.MaxInt64}, []int64{day * 1e9, math.MaxInt64}},
		{arrow.FixedWidthTypes.Date32, []int64{20577, 1 << 30}, []int64{day * 1e9, filter.NoTime}},
		{arrow.FixedWidthTypes.Date64, []int64{day * 1e3, 0}, []int64{day * 1e9, 0}},
	} {
		b := array.NewBuilder(memory.DefaultAllocator, x.dt)
		for _, v := range x.vals {
			switch b := b.(type) {
			case *array.TimestampBuilder:
				b.Append(arrow.Timestamp(v))
			case *array.Date32Builder:
				b.Append(arrow.Date32(v))
			case *array.Date64Builder:
				b.Append(arrow.Date64(v))
			}
		}
		b.AppendNull()
		got, err := appendTimes(nil, b.NewArray())
		if want := append(x.want, filter.NoTime); err != nil || fmt.Sprint(got) != fmt.Sprint(want) {
			t.Errorf("%s: got %v, %v, want %v", x.dt, got, err, want)
		}
	}
}

func TestInfinitePassesAndNaNIsMissing(t *testing.T) {
	b := array.NewFloat32Builder(memory.DefaultAllocator)
	b.AppendValues([]float32{float32(math.Inf(1)), float32(math.Inf(-1)), float32(math.NaN()), 1}, []bool{true, true, true, false})
	got, err := appendNumbers(nil, b.NewArray())
	if s := fmt.Sprint(got); err != nil || s != "[+Inf -Inf NaN NaN]" {
		t.Errorf("got %s, %v", s, err)
	}
}

// 1 is the smallest number of 16 bits, 2⁻²⁴ (IEEE 754); arrow/go reads it as 0.
func TestSmallHalvesAreNumbers(t *testing.T) {
	b := array.NewFloat16Builder(memory.DefaultAllocator)
	b.AppendValues([]float16.Num{float16.FromBits(1), float16.FromBits(0x3c00), float16.FromBits(1)}, []bool{true, true, false})
	got, err := appendNumbers(nil, b.NewArray())
	if s := fmt.Sprint(got); err != nil || s != "[5.960464477539063e-08 1 NaN]" {
		t.Errorf("got %s, %v", s, err)
	}
}

func TestIdLikeNames(t *testing.T) {
	for name, want := range map[string]bool{"id": true, "apple_id": true, "AppleID": true, "appleId": true, "uuid": true, "record key": true,
		"__index_level_0__": false, "index": true, "idle": false, "width": false, "humid": false, "id_of_crate": true, "serial-no": true, "": false, "_": false} {
		if got := idLike(name); got != want {
			t.Errorf("%q: got %v", name, got)
		}
	}
}

// A reason added to the model needs a place in the dictionary of reasons.
func TestEveryReasonHasAPlace(t *testing.T) {
	defer func() {
		if recover() == nil {
			t.Error("the model has a reason that newTagColumns leaves out")
		}
	}()
	_ = (model.InputsChanged + 1).String()
}
