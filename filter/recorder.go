package filter

import (
	"bufio"
	"context"
	"encoding/binary"
	"errors"
	"fmt"
	"io"
	"math"

	"labelweir/model"
	"labelweir/window"
)

// Resumer is a Learner that can take over from another one with the same settings.
type Resumer interface {
	Learner
	// Skip has the next fit start from no other, as it may after n fits that gave a snapshot.
	Skip(n uint64)
	// Load reads a snapshot that its WriteTo saved.
	Load(io.Reader) (Snapshot, error)
}

// recorder trains and judges, or has the results from a journal as long as it holds them. What it does itself goes into
// the journal. Without a journal it only trains and judges.
type recorder struct {
	learner Learner
	journal *Journal // nil: none
	whole   bool     // the whole input is one window

	trainings, snapshots uint64
	replay               bool
	in                   [streamSnapshot + 1]*recordReader // while replay lasts
	buf                  []byte
}

// errNoResumer is a mistake of the program.
var errNoResumer = errors.New("filter: this learner can't take over from another, so there can be no journal")

func newRecorder(l Learner, j *Journal, whole bool) (*recorder, error) {
	r := &recorder{learner: l, journal: j, whole: whole}
	if j == nil {
		return r, nil
	}
	if _, ok := l.(Resumer); !ok {
		return nil, errNoResumer
	}
	if j.last.trainings > 0 {
		r.replay = true
		for number := streamTrainings; number < len(r.in); number++ {
			r.in[number] = &recordReader{from: bufio.NewReader(j.file.Stream(number))}
		}
	}
	return r, j.begin()
}

// train gives what training on v gives. read is how many rows have been read. An error that is a *tooLittle says that the
// rows were not enough.
func (r *recorder) train(ctx context.Context, v *window.View, read int64) (t *trained, err error) {
	sum := uint64(0)
	if r.journal != nil {
		sum = sumOf(v)
	}
	marked := false
	if r.replay && r.trainings == r.journal.last.trainings {
		if err := r.goOn(sum); err != nil {
			return nil, err
		}
		marked = true
	}
	if r.replay {
		t, err = r.trainedBefore(v, sum)
	} else {
		t, err = r.trainNow(ctx, v, read, sum, marked)
	}
	if little := (*tooLittle)(nil); err == nil || errors.As(err, &little) {
		r.trainings++
	}
	if err == nil {
		r.snapshots++
	}
	return t, err
}

// sumOf tells rows to be trained on from others.
func sumOf(v *window.View) uint64 {
	var f fingerprint
	f.add(&Batch{Table: v.Table})
	return f.total()
}

// tooLittle is a training that was not possible.
type tooLittle struct {
	reason string
	kind   error // model.ErrTooFew or model.ErrOneClass
}

func (e *tooLittle) Error() string { return e.reason }
func (e *tooLittle) Unwrap() error { return e.kind }

// trainNow fits, and writes down what came of it.
func (r *recorder) trainNow(ctx context.Context, v *window.View, read int64, sum uint64, marked bool) (*trained, error) {
	fit, err := r.learner.Fit(ctx, v.Table)
	for _, kind := range []error{model.ErrTooFew, model.ErrOneClass} {
		if errors.Is(err, kind) {
			little := &tooLittle{err.Error(), kind}
			if err := r.keepFailure(little, sum); err != nil {
				return nil, err
			}
			return nil, little
		}
	}
	if err != nil {
		return nil, err
	}
	if len(fit.Scores) != len(v.Rows) {
		return nil, fmt.Errorf("filter: %d scores for %d rows of the window", len(fit.Scores), len(v.Rows))
	}
	t := &trained{snapshot: fit.Snapshot, id: fit.Snapshot.ID(), facts: fit.Snapshot.Facts(), view: v, scores: fit.Scores}
	t.disagree, t.scored = disagreement(fit.Scores)
	if r.journal == nil {
		return t, nil
	}
	if !r.whole && !marked && !t.facts.Warm && r.trainings > 0 {
		if err := r.journal.mark(point{r.trainings, r.snapshots, read, sum}); err != nil {
			return nil, err
		}
	}
	return t, r.keepTraining(t, read, sum)
}

// score judges rows as judges.score does. kind is the stream that it belongs to.
func (r *recorder) score(kind int, j *judges, fit *trained, t *model.Table, first int64, lo, hi int, dst []model.Score) error {
	if r.replay && !r.whole {
		return r.readScores(kind, fit, first+int64(lo), dst)
	}
	if err := j.score(fit, t, first, lo, hi, dst); err != nil || r.journal == nil || r.whole {
		return err
	}
	return r.keepScores(kind, first+int64(lo), dst)
}

// end makes sure that nothing is left in the journal.
func (r *recorder) end() error {
	if r.replay {
		return fmt.Errorf("%w: it tells of %d trainings, and there were only %d", ErrJournal, r.journal.last.trainings, r.trainings)
	}
	return nil
}

// goOn leaves the journal behind: what comes now it does not hold.
func (r *recorder) goOn(sum uint64) error {
	if !r.whole && sum != r.journal.last.next {
		return r.foreignRows()
	}
	for number := streamTrainings; number < streamSnapshot; number++ {
		if r.in[number].u8(); r.in[number].err != io.EOF {
			return fmt.Errorf("%w: stream %d is longer than it should be", ErrJournal, number)
		}
	}
	r.replay = false
	r.learner.(Resumer).Skip(r.snapshots)
	return nil
}

func (r *recorder) foreignRows() error {
	return fmt.Errorf("%w: the rows of training %d are not those it tells of", ErrJournal, r.trainings+1)
}

// keepScores writes scores of rows from row on.
func (r *recorder) keepScores(stream int, row int64, scores []model.Score) error {
	for len(scores) > 0 {
		n := min(len(scores), chunkRows)
		b := r.buf[:0]
		for i := range scores[:n] {
			b = appendScore(b, row+int64(i), &scores[i])
		}
		r.buf = b
		if err := r.journal.file.Write(stream, b); err != nil {
			return err
		}
		row, scores = row+int64(n), scores[n:]
	}
	return nil
}

func appendScore(b []byte, row int64, s *model.Score) []byte {
	b = binary.LittleEndian.AppendUint64(b, uint64(row))
	b = binary.LittleEndian.AppendUint64(b, math.Float64bits(s.P))
	b = binary.LittleEndian.AppendUint64(b, math.Float64bits(s.Margin))
	b = binary.LittleEndian.AppendUint32(b, uint32(s.Implied))
	return append(b, byte(s.Reason))
}

// readScores reads what keepScores wrote of rows from row on, by the snapshot of fit.
func (r *recorder) readScores(stream int, fit *trained, row int64, dst []model.Score) error {
	for i := range dst {
		if err := r.readScore(stream, fit, row+int64(i), &dst[i]); err != nil {
			return err
		}
	}
	return nil
}

func (r *recorder) readScore(stream int, fit *trained, row int64, dst *model.Score) error {
	in := r.in[stream]
	is := int64(in.u64())
	*dst = model.Score{P: math.Float64frombits(in.u64()), Margin: math.Float64frombits(in.u64()),
		Implied: int32(in.u32()), Reason: model.Reason(in.u8())}
	if in.err != nil || is != row || dst.Implied < -1 || int(dst.Implied) >= len(fit.facts.Classes) || dst.Reason > model.InputsChanged {
		return fmt.Errorf("%w: stream %d tells nothing of row %d", ErrJournal, stream, row)
	}
	return nil
}
