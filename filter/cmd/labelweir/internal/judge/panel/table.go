package panel

import (
	"fmt"
	"path/filepath"
	"slices"
	"strconv"
	"strings"

	"labelweir/model"
)

// Table is one table of the panel with the noise planted in it. It does not change after Open.
type Table struct {
	Name    string
	columns []model.Column
	truth   column
	noise   map[Cell]planted
	plans   []string
}

// Cell names one planting of noise in a table.
type Cell struct {
	Plan string
	Seed int
}

// planted is the noise of one cell.
type planted struct {
	label, flipped, source column
}

// Case is a table as a model meets it, beside the truth it must not see.
type Case struct {
	Input *model.Table
	Wrong []bool  // whether the row's observed label is wrong
	Truth []int32 // the right label, an index into Input.Classes; −1 when no row has it as observed label
	Share float64 // share of wrong labels
}

// Names lists the tables of a panel folder, sorted.
func Names(dir string) ([]string, error) {
	paths, err := filepath.Glob(filepath.Join(dir, "*.noise.arrow"))
	if err != nil {
		return nil, err
	}
	if len(paths) == 0 {
		return nil, fmt.Errorf("%s: no file NAME.noise.arrow; name a folder that holds a panel", dir)
	}
	names := make([]string, len(paths))
	for i, p := range paths {
		names[i] = strings.TrimSuffix(filepath.Base(p), ".noise.arrow")
	}
	slices.Sort(names)
	return names, nil
}

// Open reads a table of a panel folder.
func Open(dir, name string) (*Table, error) {
	data, err := readColumns(filepath.Join(dir, name+".arrow"))
	if err != nil {
		return nil, err
	}
	noise, err := readColumns(filepath.Join(dir, name+".noise.arrow"))
	if err != nil {
		return nil, err
	}
	t := &Table{Name: name, noise: map[Cell]planted{}}
	var id, noiseID []float64
	for _, c := range data {
		switch c.name {
		case "id":
			id = c.numbers
		case "label":
			t.truth = c
		default:
			t.columns = append(t.columns, feature(c))
		}
	}
	for _, c := range noise {
		if c.name == "id" {
			noiseID = c.numbers
		} else if err := t.plant(c); err != nil {
			return nil, fmt.Errorf("%s.noise.arrow: %w", name, err)
		}
	}
	if len(t.truth.codes) == 0 || !slices.Equal(id, noiseID) {
		return nil, fmt.Errorf("%s: its two files must hold the same rows, with equal id, and a label", name)
	}
	return t, nil
}

// feature turns a file column into a model column.
func feature(c column) model.Column {
	if c.codes != nil {
		return model.Column{Name: c.name, Kind: model.Category, Size: 1, Codes: c.codes, Levels: c.levels}
	}
	return model.Column{Name: c.name, Kind: model.Number, Size: 1, Values: c.numbers}
}

// plant files a column PLAN.SEED.label, .flipped or .source under its cell.
func (t *Table) plant(c column) error {
	part := strings.Split(c.name, ".")
	if len(part) != 3 {
		return fmt.Errorf("column %q is not named PLAN.SEED.label, .flipped or .source", c.name)
	}
	seed, err := strconv.Atoi(part[1])
	if err != nil {
		return fmt.Errorf("column %q: seed: %w", c.name, err)
	}
	cell := Cell{part[0], seed}
	p := t.noise[cell]
	switch part[2] {
	case "label":
		p.label = c
	case "flipped":
		p.flipped = c
	case "source":
		p.source = c
	default:
		return fmt.Errorf("column %q: ends neither in label nor flipped nor source", c.name)
	}
	t.noise[cell] = p
	if !slices.Contains(t.plans, cell.Plan) {
		t.plans = append(t.plans, cell.Plan)
	}
	return nil
}

// Plans lists the noise plans in the order of the file.
func (t *Table) Plans() []string { return t.plans }

// Has tells whether the table has the cell.
func (t *Table) Has(c Cell) bool {
	_, ok := t.noise[c]
	return ok
}

// Case puts the noise of a cell into the table. Feature columns are shared between cases.
func (t *Table) Case(c Cell) (*Case, error) {
	p, ok := t.noise[c]
	n := len(t.truth.codes)
	if !ok || len(p.label.codes) != n || len(p.flipped.flags) != n {
		return nil, fmt.Errorf("%s: no plan %s with seed %d", t.Name, c.Plan, c.Seed)
	}
	in := &model.Table{Columns: t.columns, Labels: p.label.codes, Classes: p.label.levels, Keys: make([]uint64, n)}
	if len(p.source.codes) == n {
		in.Sources, in.SourceNames = p.source.codes, p.source.levels
	}
	out := &Case{Input: in, Wrong: p.flipped.flags, Truth: make([]int32, n)}
	wrong := 0
	for i := range n {
		in.Keys[i] = model.Key(int64(i))
		out.Truth[i] = -1
		if code, ok := p.label.index[t.truth.levels[t.truth.codes[i]]]; ok {
			out.Truth[i] = code
		}
		if out.Wrong[i] {
			wrong++
		}
	}
	out.Share = float64(wrong) / float64(n)
	return out, nil
}
