package filter

import (
	"fmt"
	"math"
	"strconv"
	"strings"
	"unicode"
	"unicode/utf8"
)

const (
	pageWidth = 100 // columns
	nameWidth = 36  // of the first column of a table, its indent counted
	cellWidth = 10  // of a narrow column
	maxShown  = 24  // characters of a name
)

// page puts a summary together. A table is a head and the rows below it, whose cells take the widths of the head's.
type page struct {
	text   strings.Builder
	widths []int
}

// line writes one line.
func (p *page) line(format string, args ...any) {
	p.text.WriteString(strings.TrimRight(fmt.Sprintf(format, args...), " "))
	p.text.WriteByte('\n')
}

// head begins a section with a title, and a table when columns are named.
func (p *page) head(title string, columns ...string) {
	p.widths = p.widths[:0]
	for _, c := range columns {
		p.widths = append(p.widths, columnWidth(c))
	}
	p.line("")
	p.line("%s", p.cells(title, columns))
}

// columnWidth is the width of a column with this name.
func columnWidth(name string) int {
	if name == "90 % interval" {
		return 20
	}
	return max(cellWidth, utf8.RuneCountInString(name)+2)
}

// row writes one row of the table; a cell beyond the head's columns is a remark.
func (p *page) row(name string, cells ...string) { p.line("%s", p.cells("  "+name, cells)) }

// cells sets the name left and the cells right within their columns.
func (p *page) cells(name string, cells []string) string {
	var b strings.Builder
	b.WriteString(name)
	b.WriteString(strings.Repeat(" ", max(0, nameWidth-utf8.RuneCountInString(name))))
	for i, c := range cells {
		if i >= len(p.widths) {
			b.WriteString("  " + c)
			continue
		}
		b.WriteString(strings.Repeat(" ", max(1, p.widths[i]-utf8.RuneCountInString(c))))
		b.WriteString(c)
	}
	return clip(b.String(), pageWidth)
}

// fact writes a name and a text of as many lines as it needs; nothing when the text is empty.
func (p *page) fact(name, text string) {
	if text == "" {
		return
	}
	p.wrap(fmt.Sprintf("  %-10s", name), strings.Repeat(" ", 12), text)
}

// para writes a text of as many lines as it needs, the lines after the first one indented further.
func (p *page) para(indent, text string) { p.wrap(indent, indent+"  ", text) }

// wrap breaks a text between words.
func (p *page) wrap(first, other, text string) {
	line, empty := first, true
	for word := range strings.FieldsSeq(printable(text)) {
		if !empty && utf8.RuneCountInString(line)+1+utf8.RuneCountInString(word) > pageWidth {
			p.line("%s", line)
			line, empty = other, true
		}
		if !empty {
			line += " "
		}
		line += word
		line, empty = clip(line, pageWidth), false
	}
	p.line("%s", line)
}

// more tells that n lines were left out; nothing when n is not above 0.
func (p *page) more(n int, what string) {
	if n > 0 {
		p.line("  and %s more %s in the report", thousands(int64(n)), what)
	}
}

// shown is a name from the input as it may stand on a terminal.
func shown(name string) string {
	if name == "" {
		return `""`
	}
	return clip(printable(name), maxShown)
}

// printable escapes what is no printable character.
func printable(s string) string {
	if strings.IndexFunc(s, func(r rune) bool { return !unicode.IsPrint(r) || r == utf8.RuneError }) < 0 {
		return s
	}
	q := strconv.Quote(s)
	return strings.ReplaceAll(q[1:len(q)-1], `\"`, `"`)
}

// clip shortens a text to n characters.
func clip(s string, n int) string {
	if utf8.RuneCountInString(s) <= n {
		return s
	}
	return string([]rune(s)[:n-1]) + "…"
}

// all applies f to each name.
func all(names []string, f func(string) string) []string {
	out := make([]string, len(names))
	for i, n := range names {
		out[i] = f(n)
	}
	return out
}

// thousands writes a count with commas.
func thousands(n int64) string {
	s := strconv.FormatInt(n, 10)
	for i := len(s) - 3; i > 0 && s[i-1] != '-'; i -= 3 {
		s = s[:i] + "," + s[i:]
	}
	return s
}

// percent writes a share; a dash when it is not known.
func percent(x float64) string {
	switch {
	case math.IsNaN(x) || math.IsInf(x, 0):
		return "-"
	case x > 0 && x < 0.0005:
		return "<0.1 %"
	}
	return fmt.Sprintf("%.1f %%", 100*x)
}

// number writes a number of a few digits.
func number(x Number) string {
	if f := float64(x); !math.IsNaN(f) {
		return strconv.FormatFloat(f, 'g', 3, 64)
	}
	return "unknown"
}
