package encode

import (
	"bufio"
	"math"
	"math/rand/v2"
	"os"
	"slices"
	"sort"
	"strconv"
	"strings"
	"testing"

	"pgregory.net/rapid"
)

// all lists the rows 0 to n−1.
func all(n int) []int32 {
	out := make([]int32, n)
	for i := range out {
		out[i] = int32(i)
	}
	return out
}

// numbers fits an encoder to one column and encodes the column with it.
func numbers(values []float64) (e *Encoder, dense []float32, bins []uint8) {
	n := len(values)
	cols := []Input{{Size: 1, Values: values}}
	e = Fit(cols, all(n))
	dense, bins = make([]float32, n*e.Dense), make([]uint8, n*e.Bins)
	e.Block(cols, all(n), dense, bins)
	return e, dense, bins
}

// testdata/rankgauss.tsv holds what SciPy's rankdata and norm.ppf make of the values; rankgauss.py wrote it.
func TestRankGaussIsThatOfSciPy(t *testing.T) {
	f, err := os.Open("testdata/rankgauss.tsv")
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	values, want := map[string][]float64{}, map[string][]float64{}
	s := bufio.NewScanner(f)
	for s.Scan() {
		p := strings.Split(s.Text(), "\t")
		v, err := strconv.ParseFloat(p[1], 64)
		if err != nil {
			continue // the header
		}
		q, err := strconv.ParseFloat(p[2], 64)
		if err != nil {
			t.Fatal(err)
		}
		values[p[0]], want[p[0]] = append(values[p[0]], v), append(want[p[0]], q)
	}
	if len(values) != 4 {
		t.Fatalf("%d columns", len(values))
	}
	for name, v := range values {
		_, dense, _ := numbers(v)
		for i := range v {
			if got := float64(dense[2*i]); math.Abs(got-want[name][i]) > 1e-6 {
				t.Errorf("%s, value %v: %v, SciPy has %v", name, v[i], got, want[name][i])
			}
		}
	}
}

// With more rows than knots a value lies between two of them, never more than their distance in rank away.
func TestRankGaussOfManyRowsIsClose(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 1))
	v := make([]float64, 30000)
	for i := range v {
		v[i] = rng.NormFloat64()
	}
	_, dense, _ := numbers(v)
	for i, x := range v {
		if math.Abs(x) < 2.5 && math.Abs(float64(dense[2*i])-x) > 0.08 {
			t.Fatalf("%v became %v; normal values should hardly change", x, dense[2*i])
		}
	}
}

// awkward draws values with many ties, gaps, zeros of both signs and extremes.
func awkward() *rapid.Generator[[]float64] {
	one := rapid.OneOf(rapid.Float64Range(-3, 3), rapid.Map(rapid.IntRange(-4, 4), func(i int) float64 { return float64(i) }),
		rapid.SampledFrom([]float64{0, math.Copysign(0, -1), math.MaxFloat64, -math.MaxFloat64, math.SmallestNonzeroFloat64, 1e300, math.NaN()}))
	return rapid.SliceOfN(one, 1, 300)
}

// plain is the transform by its definition: linear search, linear interpolation.
func (u *Number) plain(v float64) (bin int, normal float64) {
	if v != v {
		v = u.Filler
	}
	for bin < len(u.Edges) && v > u.Edges[bin] {
		bin++
	}
	if len(u.Knots) == 0 {
		return bin, 0
	}
	i := sort.SearchFloat64s(u.Knots, v)
	switch {
	case i == len(u.Knots):
		return bin, u.Normal[i-1]
	case i == 0 || u.Knots[i] == v:
		return bin, u.Normal[i]
	}
	share := (v/2 - u.Knots[i-1]/2) / (u.Knots[i]/2 - u.Knots[i-1]/2)
	return bin, u.Normal[i-1] + share*(u.Normal[i]-u.Normal[i-1])
}

func TestLookupIsTheTransform(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		values := awkward().Draw(t, "values")
		e, _, _ := numbers(values)
		u := &e.Parts[0].Numbers[0]
		others := slices.Concat(awkward().Draw(t, "others"), values)
		n := len(others)
		dense, bins := make([]float32, n*e.Dense), make([]uint8, n*e.Bins)
		e.Block([]Input{{Size: 1, Values: others}}, all(n), dense, bins)
		for i, v := range others {
			bin, normal := u.plain(v)
			if int(bins[i*e.Bins]) != bin {
				t.Fatalf("%v is in bin %d, should be in %d of %v", v, bins[i*e.Bins], bin, u.Edges)
			}
			if got := float64(dense[i*e.Dense]); !(math.Abs(got-normal) < 1e-5) && !spread(u.Knots) {
				t.Fatalf("%v becomes %v, should be %v; knots %v", v, got, normal, u.Knots)
			} else if !(math.Abs(got) < 3.1) {
				t.Fatalf("%v becomes %v", v, got)
			}
			if u.Missing && (bins[i*e.Bins+1] == 1) != (v != v) {
				t.Fatalf("%v is marked missing: %d", v, bins[i*e.Bins+1])
			}
		}
	})
}

// spread tells whether neighbouring knots are so far, or so near, that their distance or its inverse is no number.
func spread(knots []float64) bool {
	for i := 1; i < len(knots); i++ {
		if d := knots[i] - knots[i-1]; math.IsInf(d, 0) || d < 1e-300 {
			return true
		}
	}
	return false
}

func TestBinsRiseWithTheValueAndAreEven(t *testing.T) {
	rng := rand.New(rand.NewPCG(2, 1))
	v := make([]float64, 6400)
	for i := range v {
		v[i] = math.Exp(rng.NormFloat64())
	}
	e, dense, bins := numbers(v)
	count := make([]int, maxBins)
	order := all(len(v))
	slices.SortFunc(order, func(a, b int32) int {
		if v[a] < v[b] {
			return -1
		}
		return 1
	})
	for k, i := range order {
		count[bins[i]]++
		if k > 0 && (bins[i] < bins[order[k-1]] || dense[2*i] < dense[2*order[k-1]]) {
			t.Fatalf("%v lies below %v", v[i], v[order[k-1]])
		}
	}
	if e.Bins != 1 || slices.Min(count) < 99 || slices.Max(count) > 101 {
		t.Errorf("%d bin columns; rows a bin %v, wanted 100", e.Bins, count)
	}
}
