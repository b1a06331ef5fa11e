package filter

import "strings"

// Nearest gives the name of known that word was most likely meant to be: the one the fewest letters away, capitals aside,
// one that only ends differently before others, and the first of several. It is empty when more than a third of the word's
// letters would have to change.
func Nearest(word string, known []string) string {
	word = strings.ToLower(word)
	best, least := "", 2*max(1, len([]rune(word))/3)+1
	for _, name := range known {
		low := strings.ToLower(name)
		d := 2 * lettersBetween(word, low)
		if strings.HasPrefix(word, low) || strings.HasPrefix(low, word) {
			d-- // a missing or added ending rather than a changed letter
		}
		if d < least {
			best, least = name, d
		}
	}
	return best
}

// lettersBetween is the least number of letters to insert, delete, replace, or swap with their neighbour, that turns a
// into b (optimal string alignment). Cost O(len(a)·len(b)).
func lettersBetween(a, b string) int {
	x, y := []rune(a), []rune(b)
	before, above, row := make([]int, len(y)+1), make([]int, len(y)+1), make([]int, len(y)+1)
	for j := range above {
		above[j] = j
	}
	for i := 1; i <= len(x); i++ {
		row[0] = i
		for j := 1; j <= len(y); j++ {
			change := 1
			if x[i-1] == y[j-1] {
				change = 0
			}
			row[j] = min(above[j]+1, row[j-1]+1, above[j-1]+change)
			if i > 1 && j > 1 && x[i-1] == y[j-2] && x[i-2] == y[j-1] {
				row[j] = min(row[j], before[j-2]+1)
			}
		}
		before, above, row = above, row, before
	}
	return above[len(y)]
}
