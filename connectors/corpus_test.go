package connectors

import (
	"flag"
	"fmt"
	"os"
	"path/filepath"
	"regexp"
	"strings"
	"testing"

	"labelweir/connectors/table"
)

var update = flag.Bool("update", false, "choose the damaged files in testdata anew, and write what is said of them")

// corpus is the folder of damaged files that are kept, whose names begin with the label's column.
const corpus = "testdata/damaged"

// TestWhatIsSaidOfDamagedFiles reads the damaged files that are kept, which also seed the fuzz targets, and compares the
// messages with those written down beside them.
func TestWhatIsSaidOfDamagedFiles(t *testing.T) {
	if *update {
		collect(t)
	}
	files, err := filepath.Glob(corpus + "/*_*")
	if err != nil || len(files) < 20 {
		t.Fatalf("only %d damaged files: %v", len(files), err)
	}
	var got strings.Builder
	for _, path := range files {
		fmt.Fprintf(&got, "%s\n", strings.TrimPrefix(said(t, path), corpus+"/"))
	}
	golden := corpus + "/messages.txt"
	if *update {
		if err := os.WriteFile(golden, []byte(got.String()), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	if want := string(read(t, golden)); got.String() != want {
		t.Errorf("got\n%s\nwant\n%s", got.String(), want)
	}
}

// said is the message about a damaged file.
func said(t *testing.T, path string) string {
	t.Helper()
	label, _, _ := strings.Cut(filepath.Base(path), "_")
	count := 0
	err := carry(path, label, filepath.Join(t.TempDir(), "out"+filepath.Ext(path)), func(table.Unreadable) error { count++; return nil })
	if err != nil {
		return err.Error()
	}
	return fmt.Sprintf("%s: %d rows can't be read", path, count)
}

// collect keeps damaged inputs of a few kilobytes, of each format some about which different things are said.
func collect(t *testing.T) {
	t.Helper()
	if err := os.RemoveAll(corpus); err != nil {
		t.Fatal(err)
	}
	if err := os.MkdirAll(corpus, 0o777); err != nil {
		t.Fatal(err)
	}
	all := bases(t)
	numbers := regexp.MustCompile(`-?[0-9]+|"[^"]*"`)
	known, kept := map[string]bool{}, map[string]int{}
	for n := range 6000 {
		d := damage(all, n)
		ext := filepath.Ext(d.base.name)
		if d.base.nested || len(d.bytes) > 6000 || kept[ext] == 12 {
			continue
		}
		path := filepath.Join(t.TempDir(), "in"+ext)
		if err := os.WriteFile(path, d.bytes, 0o644); err != nil {
			t.Fatal(err)
		}
		message := said(t, path)
		if strings.HasSuffix(message, ": 0 rows can't be read") {
			continue
		}
		message = ext + numbers.ReplaceAllString(strings.TrimPrefix(message, path), "N")
		if known[message] {
			continue
		}
		known[message] = true
		kept[ext]++
		name := fmt.Sprintf("%s_%02d%s", d.base.label, kept[ext], ext)
		if err := os.WriteFile(filepath.Join(corpus, name), d.bytes, 0o644); err != nil {
			t.Fatal(err)
		}
	}
}
