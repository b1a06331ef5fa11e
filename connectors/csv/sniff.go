package csv

import (
	"bytes"
	"strings"

	"labelweir/connectors/csv/internal/cut"
	"labelweir/connectors/internal/textrows"
)

// sniffRows is how many of the first rows tell the delimiter.
const sniffRows = 100

// sniff finds the delimiter out of the text at a file's beginning: the one by which most rows have as many cells as the
// header, at least two; among equals the one that gives more cells, then the likelier one. Without any it is a comma.
func sniff(text []byte, end bool) byte {
	best, bestShare, bestCells := byte(','), 0.0, 1
	for _, d := range []byte(delimiters) {
		share, cells := fit(text, d, end)
		if cells > 1 && (share > bestShare || share == bestShare && cells > bestCells) {
			best, bestShare, bestCells = d, share, cells
		}
	}
	return best
}

// fit gives the share of rows that have as many cells as the first, and how many that are.
func fit(text []byte, delimiter byte, end bool) (share float64, cells int) {
	var row cut.Row
	rows, same := 0, 0
	for rows < sniffRows && len(text) > 0 && row.Cut(text, delimiter, 0, end) {
		text = text[row.Next:]
		if row.Fault == cut.None && row.Text == 0 {
			continue
		}
		if rows++; rows == 1 {
			cells = row.Count
		}
		if row.Fault == cut.None && row.Count == cells {
			same++
		}
	}
	return float64(same) / float64(max(rows, 1)), cells
}

// foreign tells from the first bytes what can't be CSV text in UTF-8, and what to do; "" when nothing speaks against it.
func foreign(text []byte) (what, do string) {
	if what, do = textrows.Foreign(text); what == "" && bytes.IndexByte(text[:min(len(text), 1024)], 0) >= 0 {
		return "has zero bytes, so it is no text", "convert it to CSV text in UTF-8 first"
	}
	return what, do
}

// quoted puts a delimiter into words.
func quoted(d byte) string {
	switch d {
	case '\t':
		return "tab"
	case ' ':
		return "blank"
	}
	return strings.TrimSpace(`"` + string(rune(d)) + `"`)
}
