package demo

import (
	"bytes"
	"math"
	"os"
	"path/filepath"
	"testing"
)

func TestTheSameSeedGivesTheSameFile(t *testing.T) {
	dir := t.TempDir()
	write := func(name string, seed uint64) []byte {
		path := filepath.Join(dir, name)
		if err := Grow(600, seed).WriteLine(path); err != nil {
			t.Fatal(err)
		}
		text, err := os.ReadFile(path)
		if err != nil {
			t.Fatal(err)
		}
		return text
	}
	one := write("one", 1)
	if !bytes.Equal(one, write("again", 1)) {
		t.Error("seed 1 gave two files")
	}
	if bytes.Equal(one, write("two", 2)) {
		t.Error("seeds 1 and 2 gave the same file")
	}
}

func TestAnEarlierFileIsNotWrittenOver(t *testing.T) {
	path := filepath.Join(t.TempDir(), "line.arrow")
	if err := os.WriteFile(path, []byte("as it was"), 0o600); err != nil {
		t.Fatal(err)
	}
	if err := Grow(10, 1).WriteLine(path); err == nil {
		t.Error("no error")
	}
	if text, _ := os.ReadFile(path); string(text) != "as it was" {
		t.Errorf("the file is now %q", text)
	}
}

// TestGradersMistakeWhatTheyAreSaidTo counts over a long line: each grader's share of wrong grades in either half is
// what the table of graders says, within five standard errors.
func TestGradersMistakeWhatTheyAreSaidTo(t *testing.T) {
	const rows = 200_000
	h := Grow(rows, 3)
	var n, wrong, class1Class2 [len(graders)][2]float64
	for i := range rows {
		g, half := h.graders[i], count(h.secondHalf(i))
		n[g][half]++
		wrong[g][half] += float64(count(h.wrong(i)))
		if a, b := h.apples[i].grade, h.called[i]; a != b && a+b == class1+class2 {
			class1Class2[g][half]++
		}
	}
	for g, gr := range graders {
		for half := range 2 {
			got := wrong[g][half] / n[g][half]
			if gr.confuses > 0 && half == 1 {
				if got < 0.15 || got > 0.3 {
					t.Errorf("%s gets %.3f wrong in the second half", gr.name, got)
				}
				if share := class1Class2[g][half] / wrong[g][half]; share < 0.95 {
					t.Errorf("only %.2f of %s's mistakes are between class 1 and class 2", share, gr.name)
				}
				continue
			}
			if tolerance := 5 * math.Sqrt(gr.slip*(1-gr.slip)/n[g][half]); math.Abs(got-gr.slip) > tolerance {
				t.Errorf("%s gets %.4f wrong in half %d, planned %.4f", gr.name, got, half, gr.slip)
			}
		}
	}
}

func TestEveryGradeAndCultivarOccursAndReadingsAreMissing(t *testing.T) {
	h := Grow(5000, 1)
	byGrade, noTag, noMass, noBrix := make([]int, len(grades)), 0, 0, 0
	for _, a := range h.apples {
		byGrade[a.grade]++
		noTag += count(a.cultivar < 0)
		noMass += count(math.IsNaN(a.mass))
		noBrix += count(math.IsNaN(a.brix))
	}
	for g, n := range byGrade {
		if n < 250 {
			t.Errorf("only %d apples are %s", n, grades[g])
		}
	}
	if noTag == 0 || noMass == 0 || noBrix == 0 {
		t.Errorf("missing: %d tags, %d masses, %d sugar readings", noTag, noMass, noBrix)
	}
}
