package sweep_test

import (
	"bytes"
	"context"
	"errors"
	"io"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"labelweir/connectors/table"
	"labelweir/filter"
	"labelweir/filter/cmd/labelweir/internal/sweep"
	"labelweir/model"
)

// quickest is a learner that can take over, and whose every fit does without the one before.
type quickest struct{ quick }

func (quickest) Skip(uint64) {}

func (quickest) Load(r io.Reader) (filter.Snapshot, error) {
	_, err := io.Copy(io.Discard, r)
	return quickest{}, err
}

func (q quickest) Fit(ctx context.Context, t *model.Table) (*filter.Fit, error) {
	f, err := q.quick.Fit(ctx, t)
	f.Snapshot = q
	return f, err
}

// Facts have an estimate for each class, as those that are saved must.
func (q quickest) Facts() *model.Facts {
	f := q.quick.Facts()
	f.Noise.ByClass = make([]model.Estimate, len(f.Classes))
	f.Noise.Flip = [][]model.Estimate{f.Noise.ByClass, f.Noise.ByClass}
	return f
}

// Wherever a sweep is interrupted, and with all outputs, the next one writes the same files, and then the journal is gone.
func TestResumedSweepsWriteTheSameFiles(t *testing.T) {
	in := input(t, 3000)
	for _, window := range []string{"", "300"} {
		run := func(ctx context.Context, dir string, progress func(string, int64, int64)) ([]string, error) {
			c := job(t, in, dir)
			c.Output.Resume = true
			if window != "" {
				c.Filter.Sliding, c.Filter.Records, c.Filter.Hold = true, 300, 40
			}
			var told []string
			_, err := sweep.Run(ctx, c, sweep.Watch{Learner: quickest{}, Disk: unsynced{}, Progress: progress, Now: still,
				Tell: func(s string) { told = append(told, s) }})
			return told, err
		}
		whole := t.TempDir()
		if _, err := run(t.Context(), whole, nil); err != nil || listed(t, whole) != names {
			t.Fatalf("in one go: %v; there are %s", err, listed(t, whole))
		}
		dir := t.TempDir()
		ctx, cancel := context.WithCancel(t.Context())
		_, err := run(ctx, dir, func(phase string, _, _ int64) {
			if phase == "score" || phase == "sweep" {
				cancel()
			}
		})
		if journal := sweep.JournalPath("tagged.arrow"); !errors.Is(err, context.Canceled) || listed(t, dir) != journal {
			t.Fatalf("interrupted: %v; left are %s", err, listed(t, dir))
		}
		told, err := run(t.Context(), dir, nil)
		if err != nil || listed(t, dir) != names || len(told) != 1 || !strings.HasPrefix(told[0], "going on with ") {
			t.Fatalf("resumed: %v; it told %q; there are %s", err, told, listed(t, dir))
		}
		for name := range strings.FieldsSeq(names) {
			a, _ := os.ReadFile(filepath.Join(whole, name))
			b, _ := os.ReadFile(filepath.Join(dir, name))
			if len(a) == 0 || !bytes.Equal(a, b) {
				t.Errorf("window %q: %s differs from that of a sweep in one go", window, name)
			}
		}
	}
}

// A journal that can't be made is an error that names it, before anything is trained.
func TestAJournalThatCantBeOpenedIsNamed(t *testing.T) {
	dir := t.TempDir()
	path := sweep.JournalPath(filepath.Join(dir, "tagged.arrow"))
	if err := os.Mkdir(path, 0o777); err != nil {
		t.Fatal(err)
	}
	c := job(t, input(t, 500), dir)
	c.Output.Resume = true
	_, err := sweep.Run(t.Context(), c, sweep.Watch{Learner: quickest{}, Disk: unsynced{}})
	if !errors.Is(err, table.ErrTarget) || !strings.Contains(err.Error(), path) {
		t.Errorf("got %v", err)
	}
}

func still() time.Time { return time.Time{} }
