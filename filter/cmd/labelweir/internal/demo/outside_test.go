package demo

import (
	"encoding/json"
	"io"
	"math"
	"os"
	"os/exec"
	"reflect"
	"testing"

	"labelweir/filter/cmd/labelweir/internal/sweep"
)

// TestPyarrowAndScikitLearnAgree has the demo's files read by pyarrow, its average precision computed by scikit-learn's
// average_precision_score, and its ranking set against the one of scikit-learn's random forest, judged out of fold.
func TestPyarrowAndScikitLearnAgree(t *testing.T) {
	if out, err := exec.Command("python3", "-c", "import pyarrow, sklearn").CombinedOutput(); err != nil {
		if os.Getenv("CI") != "" {
			t.Fatalf("python3 with pyarrow and scikit-learn is needed: %v\n%s", err, out)
		}
		t.Skip("python3 with pyarrow and scikit-learn is needed: pip install pyarrow scikit-learn")
	}
	dir := t.TempDir()
	o := Options{Rows: 2000, Seed: 1, Dir: dir}
	outcome, err := Run(t.Context(), o, io.Discard, sweep.Watch{})
	if err != nil {
		t.Fatal(err)
	}
	text, err := exec.CommandContext(t.Context(), "python3", "testdata/outside.py", dir).Output()
	if err != nil {
		t.Fatalf("%v\n%s", err, err.(*exec.ExitError).Stderr)
	}
	var got struct {
		Rows        int      `json:"rows"`
		ColumnsKept bool     `json:"columns_kept"`
		TypesKept   bool     `json:"types_kept"`
		TagTypes    []string `json:"tag_types"`
		Average     float64  `json:"average_precision"`
		Forest      float64  `json:"forest_average_precision"`
	}
	if err := json.Unmarshal(text, &got); err != nil {
		t.Fatalf("%v in %s", err, text)
	}
	t.Logf("average precision %.4f, of the forest %.4f", got.Average, got.Forest)
	if got.Rows != o.Rows || !got.ColumnsKept || !got.TypesKept {
		t.Errorf("pyarrow reads %+v", got)
	}
	word := "dictionary<values=string, indices=int8, ordered=0>"
	if want := []string{"double", word, "string", "double", word, "string"}; !reflect.DeepEqual(got.TagTypes, want) {
		t.Errorf("tags are %q", got.TagTypes)
	}
	if math.Abs(got.Average-outcome.Average) > 1e-3 { // scikit-learn counts tied scores as one step
		t.Errorf("average precision %.5f, and by scikit-learn %.5f", outcome.Average, got.Average)
	}
	if got.Average < got.Forest {
		t.Errorf("average precision %.4f is below the forest's %.4f", got.Average, got.Forest)
	}
	if outcome.Held > 0 && ratio(outcome.HeldHit, outcome.Held) < 0.95 {
		t.Errorf("of %d held back only %d are wrong; 95 %% were wanted", outcome.Held, outcome.HeldHit)
	}
}
