package column

import (
	"math/rand/v2"
	"strconv"
	"testing"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
	"github.com/apache/arrow/go/v16/arrow/memory"
)

// The reference is arrow/go's own builders.
func TestArraysAreThoseOfArrowsBuilders(t *testing.T) {
	mem := memory.NewCheckedAllocator(memory.NewGoAllocator())
	defer mem.AssertSize(t, 0)
	r := rand.New(rand.NewPCG(1, 2))
	listType := arrow.FixedSizeListOf(3, arrow.PrimitiveTypes.Float64)
	var text Text
	vectors := Vectors{Size: 3}
	for round := range 200 {
		words, lists := array.NewStringBuilder(mem), array.NewFixedSizeListBuilder(mem, 3, arrow.PrimitiveTypes.Float64)
		items := lists.ValueBuilder().(*array.Float64Builder)
		for row := range r.IntN(40) {
			if r.IntN(4) == 0 { // one that is taken back
				text.Append([]byte("taken back"))
				vectors.AppendNull()
				text.Cut(row)
				vectors.Cut(row)
			}
			if round%3 > 0 && r.IntN(3) == 0 {
				words.AppendNull()
				text.AppendNull()
				lists.AppendNull()
				vectors.AppendNull()
				continue
			}
			s := strconv.Itoa(r.IntN(1e6))
			words.Append(s)
			x := []float64{r.Float64(), r.Float64(), r.Float64()}
			lists.Append(true)
			items.AppendValues(x, nil)
			vectors.Append(x)
			if row%2 == 0 {
				text.Append([]byte(s))
			} else {
				text.End(append(text.Begin(), s...))
			}
		}
		same(t, text.Take(arrow.BinaryTypes.String, mem), words.NewArray())
		same(t, vectors.Take(listType, mem), lists.NewArray())
		words.Release()
		lists.Release()
	}
}

func same(t *testing.T, got, want arrow.Array) {
	t.Helper()
	if !array.Equal(got, want) || got.NullN() != want.NullN() {
		t.Fatalf("got %v, want %v", got, want)
	}
	got.Release()
	want.Release()
}

func TestCollectingAllocatesNothingPerRow(t *testing.T) {
	var text Text
	vectors := Vectors{Size: 2}
	fill := func() {
		for range 1000 {
			text.Append([]byte("Gala"))
			text.AppendNull()
			vectors.Append([]float64{1, 2})
		}
		text.Cut(0)
		vectors.Cut(0)
	}
	fill()
	if n := testing.AllocsPerRun(10, fill); n != 0 {
		t.Errorf("%v allocations", n)
	}
}
