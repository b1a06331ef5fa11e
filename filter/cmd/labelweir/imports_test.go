package main

import (
	"go/parser"
	"go/token"
	"io/fs"
	"os"
	"path"
	"path/filepath"
	"strconv"
	"strings"
	"testing"
)

// rule says what the packages at or below a folder may import beside the standard library. The last rule whose folder
// holds a package is the one that counts for it.
type rule struct {
	below string
	may   []string // import paths; each stands for itself and everything below it
}

// importRules is the direction model <- window <- filter <- connectors <- filter/cmd/labelweir.
func importRules() []rule {
	const arrow = "github.com/apache/arrow/go/v16"
	everything := []string{"labelweir/model", "labelweir/window", "labelweir/filter", "labelweir/connectors"}
	return []rule{
		{"model", []string{"gonum.org/v1/gonum", "labelweir/model"}},
		{"window", []string{"gonum.org/v1/gonum", "labelweir/model", "labelweir/window"}},
		{"filter", []string{"gonum.org/v1/gonum", "labelweir/model", "labelweir/window", "labelweir/filter"}},
		{"filter/config", []string{"labelweir/model", "labelweir/filter", "github.com/goccy/go-yaml"}},
		{"connectors", []string{"labelweir/model", "labelweir/filter", "labelweir/connectors", arrow}},
		{"filter/cmd/labelweir", everything},
		{"filter/cmd/labelweir/internal/judge", append([]string{arrow}, everything...)},
		{"filter/cmd/labelweir/internal/demo", append([]string{arrow}, everything...)},
	}
}

// TestImportsFollowTheArrow reads the import lines of every file that goes into the program.
func TestImportsFollowTheArrow(t *testing.T) {
	root := os.DirFS("../../..")
	files := 0
	err := fs.WalkDir(root, ".", func(name string, d fs.DirEntry, err error) error {
		switch {
		case err != nil:
			return err
		case d.IsDir() && name != "." && (strings.HasPrefix(d.Name(), ".") || d.Name() == "testdata"):
			return fs.SkipDir
		case d.IsDir() || filepath.Ext(name) != ".go" || strings.HasSuffix(name, "_test.go"):
			return nil
		}
		files++
		src, err := fs.ReadFile(root, name)
		if err != nil {
			return err
		}
		file, err := parser.ParseFile(token.NewFileSet(), name, src, parser.ImportsOnly)
		if err != nil {
			return err
		}
		for _, spec := range file.Imports {
			imported, err := strconv.Unquote(spec.Path.Value)
			if err != nil {
				return err
			}
			if !allowed(path.Dir(name), imported) {
				t.Errorf("%s imports %s, which no rule for its folder allows", name, imported)
			}
		}
		return nil
	})
	if err != nil {
		t.Fatal(err)
	}
	if files < 10 {
		t.Errorf("only %d files looked at", files)
	}
}

// allowed tells whether the package in folder may import the path.
func allowed(folder, imported string) bool {
	first, _, _ := strings.Cut(imported, "/")
	if !strings.Contains(first, ".") && first != "labelweir" {
		return imported != "C" // the standard library
	}
	var may []string
	for _, r := range importRules() {
		if isBelow(folder, r.below) {
			may = r.may
		}
	}
	for _, m := range may {
		if isBelow(imported, m) {
			// The program itself is nobody's to import, but its own packages'.
			return !isBelow(imported, "labelweir/filter/cmd") || isBelow(folder, "filter/cmd")
		}
	}
	return false
}

func isBelow(p, folder string) bool { return p == folder || strings.HasPrefix(p, folder+"/") }

func TestTheRulesForbidWhatTheyShould(t *testing.T) {
	for _, c := range []struct {
		folder, imported string
		want             bool
	}{
		{"model/internal/loss", "math", true},
		{"model/internal/loss", "gonum.org/v1/gonum/mat", true},
		{"model", "labelweir/window", false},
		{"model", "github.com/apache/arrow/go/v16/arrow", false},
		{"window", "labelweir/model", true},
		{"window", "labelweir/filter", false},
		{"filter", "labelweir/window", true},
		{"filter", "labelweir/connectors/arrowfile", false},
		{"filter", "labelweir/filter/cmd/labelweir/internal/term", false},
		{"filter/config", "github.com/goccy/go-yaml/parser", true},
		{"filter", "github.com/goccy/go-yaml", false},
		{"connectors/arrowfile", "github.com/apache/arrow/go/v16/arrow", true},
		{"connectors/arrowfile", "labelweir/window", false},
		{"filter/cmd/labelweir", "labelweir/connectors/arrowfile", true},
		{"filter/cmd/labelweir", "github.com/apache/arrow/go/v16/arrow", false},
		{"filter/cmd/labelweir/internal/judge/panel", "github.com/apache/arrow/go/v16/arrow", true},
		{"elsewhere", "labelweir/model", false},
		{"filter", "C", false},
	} {
		if got := allowed(c.folder, c.imported); got != c.want {
			t.Errorf("%s imports %s: allowed is %v", c.folder, c.imported, got)
		}
	}
}
