package panel

import (
	"fmt"
	"math"
	"path/filepath"
	"slices"
	"strings"

	"labelweir/filter"
	"labelweir/model"
)

// Stream is a file of rows in arrival order. What a model may read of it is named in Record; the rest is the truth.
type Stream struct {
	Name, Path string
	Record     filter.Record // label, source, and every column that is neither id nor truth
	Wrong      []bool        // whether the row's observed label is wrong
}

// StreamNames lists the streams of a panel folder, sorted.
func StreamNames(dir string) ([]string, error) {
	paths, err := filepath.Glob(filepath.Join(dir, "streams", "*.arrow"))
	if err != nil {
		return nil, err
	}
	if len(paths) == 0 {
		return nil, fmt.Errorf("%s: no file streams/NAME.arrow; name a folder that holds a panel", dir)
	}
	names := make([]string, len(paths))
	for i, p := range paths {
		names[i] = strings.TrimSuffix(filepath.Base(p), ".arrow")
	}
	slices.Sort(names)
	return names, nil
}

// OpenStream reads the truth of a stream, and tells which of its columns are to be fed.
func OpenStream(dir, name string) (*Stream, error) {
	s := &Stream{Name: name, Path: filepath.Join(dir, "streams", name+".arrow")}
	cols, err := readColumns(s.Path)
	if err != nil {
		return nil, err
	}
	for _, c := range cols {
		switch {
		case c.name == "label":
			s.Record.Label = c.name
		case c.name == "source":
			s.Record.Source = c.name
		case c.name == "truth_flipped":
			s.Wrong = c.flags
		case c.name == "id", strings.HasPrefix(c.name, "truth_"):
		case c.codes != nil:
			s.Record.Fields = append(s.Record.Fields, filter.Field{Path: c.name, Kind: model.Category})
		default:
			s.Record.Fields = append(s.Record.Fields, filter.Field{Path: c.name, Kind: model.Number})
		}
	}
	if s.Record.Label == "" || len(s.Wrong) == 0 || len(s.Record.Fields) == 0 {
		return nil, fmt.Errorf("%s: a stream needs the columns label and truth_flipped, and features", s.Path)
	}
	return s, nil
}

// StreamBaseline is what another method reached on a stream: its figures by name, such as ap_all.
type StreamBaseline struct {
	Stream, Method string
	figures        map[string]string
}

// Figure gives a figure by name, NaN when there is none.
func (b *StreamBaseline) Figure(name string) float64 { return Number(b.figures[name]) }

// ReadStreamBaselines reads streams/baselines.tsv of a panel folder: a head of column names and one line a stream and
// method.
func ReadStreamBaselines(dir string) ([]StreamBaseline, error) {
	lines, err := ReadTSV(filepath.Join(dir, "streams", "baselines.tsv"))
	if err != nil {
		return nil, err
	}
	out := make([]StreamBaseline, len(lines))
	for i, l := range lines {
		out[i] = StreamBaseline{Stream: l["stream"], Method: l["method"], figures: l}
	}
	return out, nil
}

// BestFigure gives the best figure of any method on the stream, and which method has it; NaN when none has. Lower is
// better for ece, higher for all others. For share95, the share of rows with a score of .95 or more, only methods count
// that are right about as many of them.
func BestFigure(base []StreamBaseline, stream, name string) (float64, string) {
	best, method := math.NaN(), ""
	for i := range base {
		b := &base[i]
		v := b.Figure(name)
		if b.Stream != stream || math.IsNaN(v) || name == "share95" && !(b.Figure("prec95") >= 0.95) {
			continue
		}
		if math.IsNaN(best) || Better(name, v, best) > 0 {
			best, method = v, b.Method
		}
	}
	return best, method
}

// Better is by how much a is better than b as a figure of that name; negative when it is worse.
func Better(name string, a, b float64) float64 {
	if name == "ece" {
		return b - a
	}
	return a - b
}
