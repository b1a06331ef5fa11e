package filter

import "testing"

func TestNearestNamesTheWordMeant(t *testing.T) {
	known := []string{"label", "source", "time", "fields", "precision", "budget"}
	for _, c := range []struct{ word, want string }{
		{"lable", "label"},
		{"labels", "label"},
		{"presicion", "precision"},
		{"buget", "budget"},
		{"tiem", "time"},
		{"field", "fields"},
		{"kafka", ""},
		{"", ""},
	} {
		if got := Nearest(c.word, known); got != c.want {
			t.Errorf("Nearest(%q) = %q, want %q", c.word, got, c.want)
		}
	}
}

func TestLettersBetweenCountsTheLeastChanges(t *testing.T) {
	for _, c := range []struct {
		a, b string
		want int
	}{
		{"", "", 0}, {"", "abc", 3}, {"abc", "", 3}, {"kitten", "sitting", 3}, {"ab", "ba", 1}, {"größe", "groesse", 4},
	} {
		if got := lettersBetween(c.a, c.b); got != c.want {
			t.Errorf("lettersBetween(%q, %q) = %d, want %d", c.a, c.b, got, c.want)
		}
	}
}
