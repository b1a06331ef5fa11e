package filter

import (
	"slices"
	"sync"

	"labelweir/model"
	"labelweir/window"
)

// chunkRows is how many rows a worker judges at a time: enough that handing them over costs nothing.
const chunkRows = 1024

// trained is a fit with the rows it was made from. What a journal tells of a fit that a sliding window has left behind
// lacks snapshot and scores: no row is judged by it again.
type trained struct {
	snapshot Snapshot
	id       string
	facts    *model.Facts
	view     *window.View
	scores   []model.Score // one a row of view, each by a model that did not see the row's own label

	disagree, scored int // how many of scores disagree with the label, and how many can tell
}

// judges is a fixed set of goroutines that judge rows side by side. What they say does not depend on their number.
type judges struct {
	jobs  chan job // unbuffered: a job is taken by whoever is free
	ended sync.WaitGroup
}

// job is a run of rows of one table for one worker.
type job struct {
	fit    *trained
	table  *model.Table
	first  int64 // row number of the table's first row
	lo, hi int
	dst    []model.Score // hi − lo
	err    *error
	done   *sync.WaitGroup
}

// startJudges starts n workers; stop ends them.
func startJudges(n int) *judges {
	j := &judges{jobs: make(chan job)}
	for range n {
		j.ended.Go(func() {
			w := judge{}
			for job := range j.jobs {
				*job.err = w.run(job)
				job.done.Done()
			}
		})
	}
	return j
}

func (j *judges) stop() {
	close(j.jobs)
	j.ended.Wait()
}

// score writes into dst what fit says of rows lo ≤ i < hi of t: a row it was trained on has the score of the model
// that did not see its label, any other is judged by the snapshot. The error is that of the first row that has one.
func (j *judges) score(fit *trained, t *model.Table, first int64, lo, hi int, dst []model.Score) error {
	var done sync.WaitGroup
	errs := make([]error, (hi-lo+chunkRows-1)/chunkRows)
	done.Add(len(errs))
	for k := range errs {
		from := lo + k*chunkRows
		to := min(hi, from+chunkRows)
		j.jobs <- job{fit: fit, table: t, first: first, lo: from, hi: to, dst: dst[from-lo : to-lo], err: &errs[k], done: &done}
	}
	done.Wait()
	for _, err := range errs {
		if err != nil {
			return err
		}
	}
	return nil
}

// judge is one worker's scorer, of the snapshot it was asked for last.
type judge struct {
	fit    *trained
	scorer Scorer
}

func (w *judge) run(j job) error {
	if w.fit != j.fit {
		w.fit, w.scorer = j.fit, j.fit.snapshot.NewScorer()
	}
	rows := j.fit.view.Rows
	begin, end := j.first+int64(j.lo), j.first+int64(j.hi)
	at, _ := slices.BinarySearch(rows, begin)
	known, _ := slices.BinarySearch(rows[at:], end)
	trained, scores := rows[at:at+known], j.fit.scores[at:at+known]
	// A scorer is quicker at many rows in a go than the few between two sampled ones, so that it judges some in vain.
	var err error
	if 2*known < j.hi-j.lo {
		err = w.scorer.Score(j.table, j.lo, j.hi, j.dst)
	} else {
		err = w.between(j, trained)
	}
	for i, row := range trained {
		j.dst[row-begin] = scores[i]
	}
	return err
}

// between judges the rows that were not trained on, run by run.
func (w *judge) between(j job, trained []int64) error {
	lo := j.lo
	for k := 0; k <= len(trained); k++ {
		hi := j.hi
		if k < len(trained) {
			hi = int(trained[k] - j.first)
		}
		if lo < hi {
			if err := w.scorer.Score(j.table, lo, hi, j.dst[lo-j.lo:hi-j.lo]); err != nil {
				return err
			}
		}
		lo = hi + 1
	}
	return nil
}
