package demo

import (
	"fmt"
	"math"
	"os"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
	"github.com/apache/arrow/go/v16/arrow/ipc"
)

// found is what the sweep said of each apple, by apple number.
type found struct {
	score   []float64 // NaN: not scored
	verdict []string
	held    []bool // it stands in the quarantine file
}

// readFound collects the tags of rows apples from the two files that the sweep wrote. It is an error when an apple is
// missing or stands there twice.
func readFound(rows int, tagged, quarantine string) (*found, error) {
	f := &found{score: make([]float64, rows), verdict: make([]string, rows), held: make([]bool, rows)}
	met := 0
	for _, file := range []struct {
		path string
		held bool
	}{{tagged, false}, {quarantine, true}} {
		n, err := f.read(file.path, file.held)
		if err != nil {
			return nil, fmt.Errorf("%s: %w", file.path, err)
		}
		met += n
	}
	if met != rows {
		return nil, fmt.Errorf("%d apples went in, %d came out", rows, met)
	}
	return f, nil
}

func (f *found) read(path string, held bool) (rows int, err error) {
	file, err := os.Open(path)
	if err != nil {
		return 0, err
	}
	defer file.Close()
	r, err := ipc.NewFileReader(file)
	if err != nil {
		return 0, err
	}
	defer r.Close()
	for i := range r.NumRecords() {
		record, err := r.Record(i)
		if err != nil {
			return rows, err
		}
		if err := f.take(record, held); err != nil {
			return rows, err
		}
		rows += int(record.NumRows())
	}
	return rows, nil
}

func (f *found) take(record arrow.Record, held bool) error {
	ids, err := column[*array.Int64](record, "apple_id")
	if err != nil {
		return err
	}
	scores, err := column[*array.Float64](record, "weir_score")
	if err != nil {
		return err
	}
	verdicts, err := column[*array.Dictionary](record, "weir_verdict")
	if err != nil {
		return err
	}
	names, ok := verdicts.Dictionary().(*array.String)
	if !ok {
		return fmt.Errorf("weir_verdict holds no text")
	}
	for i := range ids.Len() {
		id := ids.Value(i)
		if id < 0 || id >= int64(len(f.score)) || f.verdict[id] != "" {
			return fmt.Errorf("apple %d is none of the line's, or stands twice", id)
		}
		f.score[id], f.verdict[id], f.held[id] = math.NaN(), names.Value(verdicts.GetValueIndex(i)), held
		if !scores.IsNull(i) {
			f.score[id] = scores.Value(i)
		}
	}
	return nil
}

// column gives the column of that name and type.
func column[A arrow.Array](record arrow.Record, name string) (none A, err error) {
	at := record.Schema().FieldIndices(name)
	if len(at) != 1 {
		return none, fmt.Errorf("%d columns are named %s", len(at), name)
	}
	a, ok := record.Column(at[0]).(A)
	if !ok {
		return none, fmt.Errorf("%s is a column of %s", name, record.Column(at[0]).DataType())
	}
	return a, nil
}
