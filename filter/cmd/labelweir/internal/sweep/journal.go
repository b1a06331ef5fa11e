package sweep

import (
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"runtime"
	"slices"
	"strings"
	"time"

	"labelweir/connectors/table"
	"labelweir/filter"
	"labelweir/filter/config"
)

// journal is the file from which an interrupted sweep can be gone on with; nil: none is wanted.
type journal struct {
	file *journalFile
	of   *filter.Journal
}

// JournalPath is where the journal of the sweep that writes tagged stands: hidden, beside it.
func JournalPath(tagged string) string {
	return filepath.Join(filepath.Dir(tagged), "."+filepath.Base(tagged)+".resume")
}

// tell hands a sentence on.
func (w *Watch) tell(format string, args ...any) {
	if w.Tell != nil {
		w.Tell(fmt.Sprintf(format, args...))
	}
}

// openJournal opens the journal, or makes an empty one, when the settings want one; else it tells when there is one. The
// error says what is not as it was when the journal was begun.
func openJournal(c *config.Config, files []table.Input, w Watch) (*journal, error) {
	path := JournalPath(c.Output.Tagged)
	if !c.Output.Resume {
		if _, err := os.Stat(path); c.Output.Tagged != config.Pipe && err == nil {
			w.tell("%s is left of an interrupted sweep, which --resume goes on with; this one begins anew", path)
		}
		return nil, nil
	}
	file, err := os.OpenFile(path, os.O_RDWR|os.O_CREATE, 0o666)
	if err != nil {
		return nil, &table.Error{Path: path, What: "the journal can't be opened", Do: "check its permissions and its folder's, or leave --resume out",
			Kind: table.ErrTarget, Err: bareCause(err)}
	}
	j := &journal{file: &journalFile{file}}
	j.of, err = filter.OpenJournal(j.file, conditions(c, files, w.Program))
	if err != nil {
		defer j.close()
		return nil, j.explain(err)
	}
	if trainings, rows := j.of.Taken(); trainings > 0 {
		w.tell("going on with %s: %d trainings, up to row %d, are taken over", path, trainings, rows)
	}
	return j, nil
}

// conditions are what must be the same for a sweep to go on with another's journal: the program, the machine's way to
// calculate, the input, and all settings but those of outputs and of what does not show in them.
func conditions(c *config.Config, files []table.Input, program string) []filter.Condition {
	list := []filter.Condition{{Name: "program", Value: program + ", " + runtime.GOOS + "/" + runtime.GOARCH}}
	for i, f := range files {
		path, value := f.Path, "a file that can't be looked at"
		if full, err := filepath.Abs(path); err == nil {
			path = full
		}
		if info, err := os.Stat(f.Path); err == nil {
			value = fmt.Sprintf("%s, %d bytes of %s", path, info.Size(), info.ModTime().UTC().Format(time.RFC3339Nano))
		}
		list = append(list, filter.Condition{Name: fmt.Sprintf("input %d", i+1), Value: value})
	}
	free := []string{"input.file.path", "input.trust", "input.memory", "retrain.workers", "filter.gate"}
	for _, s := range config.Settings() {
		if !slices.Contains(free, s.Path) && !strings.HasPrefix(s.Path, "output.") {
			list = append(list, filter.Condition{Name: s.Path, Value: s.Text(c)})
		}
	}
	return list
}

// kept is what the sweep gets.
func (j *journal) kept() *filter.Journal {
	if j == nil {
		return nil
	}
	return j.of
}

const anew = "remove the journal to begin anew, or leave --resume out"

// explain says of an error of the journal's where it stands and what to do.
func (j *journal) explain(err error) error {
	if j == nil {
		return err
	}
	path := j.file.Name()
	var other *filter.OtherError
	switch {
	case errors.As(err, &other):
		kind, what := error(filter.ErrConfig), fmt.Sprintf("it is the journal of a sweep with %s %s, and now it is %s", other.Name, quoted(other.Was), quoted(other.Now))
		if strings.HasPrefix(other.Name, "input ") || other.Name == "program" {
			kind, what = table.ErrUnreadable, fmt.Sprintf("it is the journal of a sweep whose %s was %s, and now it is %s", other.Name, quoted(other.Was), quoted(other.Now))
		}
		return &table.Error{Path: path, What: what, Do: anew, Kind: kind}
	case errors.Is(err, filter.ErrForeignJournal), errors.Is(err, filter.ErrJournal):
		return &table.Error{Path: path, What: err.Error(), Do: anew, Kind: table.ErrUnreadable}
	}
	return err
}

// quoted is a value as messages show it.
func quoted(value string) string {
	if value == "" {
		return "none"
	}
	return value
}

// tellKept says what a sweep that has failed leaves behind.
func (j *journal) tellKept(w Watch) {
	if j == nil {
		return
	}
	if trainings, rows := j.of.Taken(); trainings > 0 {
		w.tell("%s keeps %d trainings, up to row %d, for --resume", j.file.Name(), trainings, rows)
	}
}

// close gives the file back: what it holds up to its last mark is on the disk already. One that holds no training goes.
func (j *journal) close() {
	if j == nil {
		return
	}
	_ = j.file.Close()
	if j.of == nil { // it is another's
		return
	}
	if trainings, _ := j.of.Taken(); trainings == 0 {
		_ = os.Remove(j.file.Name())
	}
}

// remove removes the file after a sweep that ended well. That it can't be removed makes nothing wrong with the outputs.
func (j *journal) remove() {
	if j != nil {
		_ = j.file.Close() // some systems remove no open file
		_ = os.Remove(j.file.Name())
	}
}

// journalFile has its errors say which file it is.
type journalFile struct{ *os.File }

func (f *journalFile) WriteAt(b []byte, at int64) (int, error) {
	n, err := f.File.WriteAt(b, at)
	return n, f.fault("can't be written", err)
}

func (f *journalFile) Truncate(size int64) error {
	return f.fault("can't be cut", f.File.Truncate(size))
}

func (f *journalFile) Sync() error { return f.fault("can't be written", f.File.Sync()) }

// fault is an error of writing.
func (f *journalFile) fault(what string, err error) error {
	if err == nil {
		return nil
	}
	return &table.Error{Path: f.Name(), What: "the journal " + what, Do: "make room or write elsewhere, or leave --resume out",
		Kind: table.ErrWrite, Err: bareCause(err)}
}
