package arrowfile

import "strings"

// nearest is the name that takes the fewest edits to get from what was asked for, capitals aside; "" when even that
// needs more than a third of the letters changed.
func nearest(asked string, names []string) string {
	asked = strings.ToLower(asked)
	best, least := "", 2*max(1, len([]rune(asked))/3)+1
	for _, n := range names {
		low := strings.ToLower(n)
		d := 2 * edits(asked, low)
		if strings.HasPrefix(asked, low) || strings.HasPrefix(low, asked) {
			d-- // a missing or added ending rather than a changed letter
		}
		if d < least {
			best, least = n, d
		}
	}
	return best
}

// edits is the number of letters to insert, delete or replace to turn a into b (Levenshtein 1966). Cost O(len a·len b).
func edits(a, b string) int {
	x, y := []rune(a), []rune(b)
	row := make([]int, len(y)+1)
	for j := range row {
		row[j] = j
	}
	for i := range x {
		diagonal := row[0]
		row[0] = i + 1
		for j := range y {
			swap := diagonal
			if x[i] != y[j] {
				swap++
			}
			diagonal = row[j+1]
			row[j+1] = min(swap, row[j]+1, row[j+1]+1)
		}
	}
	return row[len(y)]
}
