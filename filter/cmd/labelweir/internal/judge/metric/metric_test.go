package metric

import (
	"encoding/json"
	"math"
	"os"
	"testing"
)

// golden is what testdata/golden.py writes: figures by scikit-learn.
type golden struct {
	Cases []struct {
		Name              string
		Wrong             []bool
		P                 []float64
		AveragePrecision  float64 `json:"average_precision"`
		ECE               float64
		Precision, Recall float64
	}
	Flips struct {
		Truth, Observed []int32
		Rates           [][]float64
	}
}

func readGolden(t *testing.T) golden {
	t.Helper()
	text, err := os.ReadFile("testdata/golden.json")
	if err != nil {
		t.Fatal(err)
	}
	var g golden
	if err := json.Unmarshal(text, &g); err != nil {
		t.Fatal(err)
	}
	if len(g.Cases) < 4 {
		t.Fatalf("%d cases in golden.json, want at least 4", len(g.Cases))
	}
	return g
}

func near(t *testing.T, what string, got, want float64) {
	t.Helper()
	if math.Abs(got-want) > 1e-12 || math.IsNaN(got) != math.IsNaN(want) {
		t.Errorf("%s = %v, want %v", what, got, want)
	}
}

func TestFiguresAgreeWithScikitLearn(t *testing.T) {
	g := readGolden(t)
	for _, c := range g.Cases {
		t.Run(c.Name, func(t *testing.T) {
			near(t, "average precision", AveragePrecision(c.Wrong, c.P), c.AveragePrecision)
			cal := Calibrate(c.Wrong, c.P)
			near(t, "calibration error", cal.Error(), c.ECE)
			cut := CutAt(c.Wrong, c.P, 0.5)
			near(t, "precision", cut.Precision(), c.Precision)
			near(t, "recall", cut.Recall(), c.Recall)
		})
	}
	rates := FlipRates(g.Flips.Truth, g.Flips.Observed, 4)
	largest, mean := MatrixError(rates, g.Flips.Rates)
	near(t, "largest difference of flip rates", largest, 0)
	near(t, "mean difference of flip rates", mean, 0)
}

// By hand: scores .9 (wrong), .5 .5 (one wrong), .1 (right), not judged (wrong, ranks last with score 0).
// Precision after each score: 1/1, 2/3, 2/4, 3/5; recall steps 1/3, 1/3, 0, 1/3.
func TestAveragePrecisionByHand(t *testing.T) {
	wrong := []bool{true, true, false, false, true}
	p := []float64{0.9, 0.5, 0.5, 0.1, math.NaN()}
	near(t, "average precision", AveragePrecision(wrong, p), (1+2.0/3+3.0/5)/3)
	near(t, "average precision without a wrong label", AveragePrecision([]bool{false}, []float64{1}), math.NaN())
}

// By hand: bin 0 holds .05 and .0 (none wrong), bin 9 holds 1 and .9 (one wrong), and a NaN counts nowhere.
func TestCalibrationByHand(t *testing.T) {
	c := Calibrate([]bool{false, false, true}, []float64{0.05, 0, 1})
	c.Merge(Calibrate([]bool{false, true}, []float64{0.9, math.NaN()}))
	if c.Rows() != 4 {
		t.Fatalf("Rows = %d, want 4", c.Rows())
	}
	near(t, "calibration error", c.Error(), 0.5*0.025+0.5*(0.95-0.5))
	rows, mean, share := c.Bin(9)
	if rows != 2 {
		t.Errorf("Bin(9) has %d rows, want 2", rows)
	}
	near(t, "mean score of bin 9", mean, 0.95)
	near(t, "share wrong of bin 9", share, 0.5)
	var empty Calibration
	near(t, "calibration error of nothing", empty.Error(), math.NaN())
}

func TestCutLeavesOutWhatWasNotJudged(t *testing.T) {
	c := CutAt([]bool{true, false, true, true}, []float64{0.95, 0.97, math.NaN(), 0.2}, 0.95)
	if want := (Cut{Rows: 4, Wrong: 3, Caught: 2, Hits: 1}); c != want {
		t.Errorf("got %+v, want %+v", c, want)
	}
	near(t, "share", c.Share(), 0.5)
	none := CutAt([]bool{true}, []float64{1}, 1.5)
	near(t, "precision of nothing", none.Precision(), math.NaN())
	c.Add(none)
	if c.Rows != 5 || c.Wrong != 4 || c.Caught != 2 {
		t.Errorf("after Add: %+v", c)
	}
}

func TestFlipRatesOfAnAbsentClassAreLeftOut(t *testing.T) {
	rates := FlipRates([]int32{0, 0, 1, -1}, []int32{0, 1, 1, 0}, 3)
	near(t, "rate 0 to 1", rates[0][1], 0.5)
	near(t, "rate of the absent class", rates[2][0], math.NaN())
	largest, mean := MatrixError(rates, [][]float64{{0.7, 0.3, 0}, {0, 1, 0}, {0, 0, 1}})
	near(t, "largest", largest, 0.2)
	near(t, "mean", mean, 0.4/6)
}
