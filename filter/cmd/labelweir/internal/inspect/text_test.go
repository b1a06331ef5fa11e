package inspect

import (
	"flag"
	"math"
	"os"
	"strings"
	"testing"

	"labelweir/model"
)

var update = flag.Bool("update", false, "write what was got into testdata")

func share(v float64, rows int) model.Estimate {
	return model.Estimate{Value: v, Low: v / 2, High: v * 2, Rows: rows}
}

func facts() *model.Facts {
	return &model.Facts{
		Rows: 8000, Classes: []string{"class-1", "class-2", "juice"}, ClassRows: []int{4000, 3100, 900},
		Sources: []string{"grader-a", "größer"}, Threshold: 0.8125,
		Choice: model.Choice{Encoder: "deep", Q: -0.5, Lambda: 0.003, Why: "highest likelihood out of fold",
			Members: []model.Member{{Name: "margin", Weight: 1.25}, {Name: "vote", Weight: 0.5}}},
		Chains: []model.Chain{{Name: "graduated", Tried: 18, Won: 12, MeanGap: 0.0004}},
		Noise: model.Noise{
			Share: share(0.04, 8000), Model: "sparse", Unclear: []string{"juice"},
			ByClass:  []model.Estimate{share(0.05, 4000), share(0.03, 3100), share(math.NaN(), 900)},
			BySource: []model.Estimate{share(0.01, 4000), share(0.2, 4000)},
			Flip: [][]model.Estimate{
				{share(0.95, 1), share(0.05, 1), share(0, 1)},
				{share(0.1, 1), share(0.9, 1), share(0, 1)},
				{share(0, 1), share(math.NaN(), 1), share(1, 1)},
			},
		},
	}
}

func TestTextPutsASnapshotIntoWords(t *testing.T) {
	restless := facts()
	restless.Warm, restless.Threshold = true, 1.5
	for name, f := range map[string]*model.Facts{"full": facts(), "restless": restless, "bare": {Rows: 60, Threshold: 0.9}} {
		var b strings.Builder
		if err := Text(&b, "0123456789ab", f); err != nil {
			t.Fatal(err)
		}
		golden := "testdata/" + name + ".golden"
		if *update {
			if err := os.WriteFile(golden, []byte(b.String()), 0o644); err != nil {
				t.Fatal(err)
			}
		}
		want, err := os.ReadFile(golden)
		if err != nil {
			t.Fatal(err)
		}
		if b.String() != string(want) {
			t.Errorf("%s: got\n%swant\n%s", name, b.String(), want)
		}
	}
}
