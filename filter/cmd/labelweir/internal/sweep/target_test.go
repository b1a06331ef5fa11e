package sweep

import (
	"errors"
	"io"
	"os"
	"path/filepath"
	"testing"

	"labelweir/connectors/table"
)

func write(text string) func(io.Writer) error {
	return func(w io.Writer) error { _, err := io.WriteString(w, text); return err }
}

// only fails unless the folder holds just these files with these contents.
func only(t *testing.T, dir string, want map[string]string) {
	t.Helper()
	entries, err := os.ReadDir(dir)
	if err != nil {
		t.Fatal(err)
	}
	if len(entries) != len(want) {
		t.Errorf("the folder holds %v", entries)
	}
	for name, text := range want {
		if got, err := os.ReadFile(filepath.Join(dir, name)); err != nil || string(got) != text {
			t.Errorf("%s holds %q, %v", name, got, err)
		}
	}
}

func TestATargetStandsUnderItsNameOnlyWhenCommitted(t *testing.T) {
	dir := t.TempDir()
	path := filepath.Join(dir, "report.json")
	dropped, err := openTarget(path, false)
	if err != nil {
		t.Fatal(err)
	}
	if _, err := os.Stat(path); !errors.Is(err, os.ErrNotExist) {
		t.Errorf("it stands there from the start: %v", err)
	}
	dropped.close()
	only(t, dir, nil)
	kept, err := openTarget(path, false)
	if err != nil {
		t.Fatal(err)
	}
	if err := kept.commit(write("all of it")); err != nil {
		t.Fatal(err)
	}
	kept.close()
	only(t, dir, map[string]string{"report.json": "all of it"})
}

func TestAFileThatExistsIsReplacedOnlyOnRequest(t *testing.T) {
	dir := t.TempDir()
	path := filepath.Join(dir, "report.json")
	if err := os.WriteFile(path, []byte("as it was"), 0o666); err != nil {
		t.Fatal(err)
	}
	if _, err := openTarget(path, false); !errors.Is(err, table.ErrTarget) {
		t.Errorf("got %v", err)
	}
	only(t, dir, map[string]string{"report.json": "as it was"})
	target, err := openTarget(path, true)
	if err != nil {
		t.Fatal(err)
	}
	defer target.close()
	if err := target.commit(write("new")); err != nil {
		t.Fatal(err)
	}
	only(t, dir, map[string]string{"report.json": "new"})
}

func TestAFileThatCameMeanwhileIsNotWrittenOver(t *testing.T) {
	dir := t.TempDir()
	path := filepath.Join(dir, "report.json")
	target, err := openTarget(path, false)
	if err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(path, []byte("another's"), 0o666); err != nil {
		t.Fatal(err)
	}
	if err := target.commit(write("mine")); !errors.Is(err, table.ErrTarget) {
		t.Errorf("got %v", err)
	}
	target.close()
	only(t, dir, map[string]string{"report.json": "another's"})
}

func TestAFailedWriteLeavesNothing(t *testing.T) {
	dir := t.TempDir()
	target, err := openTarget(filepath.Join(dir, "report.json"), false)
	if err != nil {
		t.Fatal(err)
	}
	full := errors.New("no room")
	err = target.commit(func(w io.Writer) error {
		if _, err := io.WriteString(w, "half of"); err != nil {
			return err
		}
		return full
	})
	if !errors.Is(err, table.ErrWrite) || !errors.Is(err, full) {
		t.Errorf("got %v", err)
	}
	target.close()
	only(t, dir, nil)
}

func TestTargetsThatCanNotBe(t *testing.T) {
	dir := t.TempDir()
	for _, path := range []string{dir, filepath.Join(dir, "missing", "report.json"), os.DevNull} {
		if _, err := openTarget(path, true); !errors.Is(err, table.ErrTarget) {
			t.Errorf("%s: got %v", path, err)
		}
	}
	none, err := openTarget("", false)
	if none != nil || err != nil || none.commit(write("x")) != nil {
		t.Errorf("an unwanted file gave %v, %v", none, err)
	}
	none.close()
}
