package filter

import (
	"encoding/binary"
	"fmt"
	"io"

	"labelweir/model"
	"labelweir/window"
)

// What came of a training, as it stands in the journal.
const (
	gaveSnapshot byte = iota
	gaveTooFew
	gaveOneClass
)

// keepFailure writes down a training that was not possible.
func (r *recorder) keepFailure(e *tooLittle, sum uint64) error {
	if r.journal == nil {
		return nil
	}
	outcome := gaveTooFew
	if e.kind == model.ErrOneClass {
		outcome = gaveOneClass
	}
	b := binary.LittleEndian.AppendUint64([]byte{outcome}, sum)
	return r.journal.file.Write(streamTrainings, appendText(b, e.reason))
}

// keepTraining writes down a snapshot: what a sliding window needs of it to decide rows that are judged already; of a
// whole input all of it, and a mark.
func (r *recorder) keepTraining(t *trained, read int64, sum uint64) error {
	facts, err := t.facts.AppendBinary(nil)
	if err != nil {
		return err
	}
	b := binary.LittleEndian.AppendUint64([]byte{gaveSnapshot}, sum)
	b = appendText(appendText(b, t.id), facts)
	b = binary.LittleEndian.AppendUint64(b, uint64(t.disagree))
	b = binary.LittleEndian.AppendUint64(b, uint64(t.scored))
	if err := r.journal.file.Write(streamTrainings, b); err != nil || !r.whole {
		return err
	}
	for i := range t.scores {
		if err := r.keepScores(streamDecided, t.view.Rows[i], t.scores[i:i+1]); err != nil {
			return err
		}
	}
	if _, err := t.snapshot.WriteTo(streamWriter{r.journal}); err != nil {
		return err
	}
	rows := max(read, t.view.Rows[len(t.view.Rows)-1]+1)
	return r.journal.mark(point{r.trainings + 1, r.snapshots + 1, rows, 0})
}

// streamWriter writes the snapshot's stream.
type streamWriter struct{ j *Journal }

// Write implements io.Writer.
func (w streamWriter) Write(p []byte) (int, error) {
	if err := w.j.file.Write(streamSnapshot, p); err != nil {
		return 0, err
	}
	return len(p), nil
}

// trainedBefore reads what the next training came to.
func (r *recorder) trainedBefore(v *window.View, sum uint64) (*trained, error) {
	in := r.in[streamTrainings]
	outcome, was := in.u8(), in.u64()
	if in.err == nil && was != sum {
		return nil, r.foreignRows()
	}
	var t *trained
	var err error
	switch outcome {
	case gaveSnapshot:
		t, err = r.readTraining(v)
	case gaveTooFew:
		err = &tooLittle{in.text(), model.ErrTooFew}
	case gaveOneClass:
		err = &tooLittle{in.text(), model.ErrOneClass}
	default:
		return nil, fmt.Errorf("%w: a training came to %d", ErrJournal, outcome)
	}
	if in.err != nil {
		return nil, fmt.Errorf("%w: training %d: %w", ErrJournal, r.trainings+1, in.err)
	}
	return t, err
}

// readTraining reads a snapshot: its facts or, of a whole input, all of it.
func (r *recorder) readTraining(v *window.View) (*trained, error) {
	in := r.in[streamTrainings]
	t := &trained{id: in.text(), facts: new(model.Facts), view: v}
	if err := t.facts.UnmarshalBinary([]byte(in.text())); err != nil {
		return nil, fmt.Errorf("%w: training %d: %w", ErrJournal, r.trainings+1, err)
	}
	t.disagree, t.scored = int(in.u64()), int(in.u64())
	if !r.whole {
		return t, nil
	}
	t.scores = make([]model.Score, len(v.Rows))
	for i := range t.scores {
		if err := r.readScore(streamDecided, t, v.Rows[i], &t.scores[i]); err != nil {
			return nil, err
		}
	}
	var err error
	if t.snapshot, err = r.learner.(Resumer).Load(r.in[streamSnapshot].from); err != nil {
		return nil, fmt.Errorf("%w: %w", ErrJournal, err)
	}
	if t.snapshot.ID() != t.id {
		return nil, fmt.Errorf("%w: it holds the snapshot %s, not %s", ErrJournal, t.snapshot.ID(), t.id)
	}
	if n, _ := io.Copy(io.Discard, r.in[streamSnapshot].from); n > 0 {
		return nil, fmt.Errorf("%w: %d bytes follow the snapshot", ErrJournal, n)
	}
	t.facts = t.snapshot.Facts()
	r.replay = false
	return t, nil
}
