//go:build unix

package connectors

import (
	"bytes"
	"errors"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"strconv"
	"strings"
	"testing"
	"time"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
	"github.com/apache/arrow/go/v16/arrow/ipc"
	"github.com/apache/arrow/go/v16/arrow/memory"
	goparquet "github.com/apache/arrow/go/v16/parquet"
	"github.com/apache/arrow/go/v16/parquet/compress"
	"github.com/apache/arrow/go/v16/parquet/pqarrow"
)

// What a sweep of one damaged file may take at the command: address space beyond the program's own, and time, most of
// which training takes.
const (
	commandMemory = "1GiB"
	commandTime   = time.Minute
)

// TestDamagedAtTheCommand sweeps damaged files with the program itself, nested Parquet ones and decompression bombs among
// them. It ends with 0 and a whole output, or with 65, a message of one line that names the file, and no output; never
// by a signal or with a trace. LABELWEIR_LONG makes it a tenth of the inputs that TestDamaged makes.
func TestDamagedAtTheCommand(t *testing.T) {
	if testing.Short() {
		t.Skip("builds the program")
	}
	program := filepath.Join(t.TempDir(), "labelweir")
	if out, err := exec.Command("go", "build", "-o", program, "labelweir/filter/cmd/labelweir").CombinedOutput(); err != nil {
		t.Fatalf("%v\n%s", err, out)
	}
	all := bases(t)
	count := damagedInputs() / 10
	if os.Getenv("LABELWEIR_LONG") == "" {
		count = 15
	}
	codes := map[int]int{}
	sweep := func(about string, d damaged) {
		code, fault := sweepDamaged(t, program, d)
		if fault != "" {
			t.Errorf("%s, %s, %s: %s", about, d.base.name, d.harm, fault)
		}
		codes[code]++
	}
	for i := range count {
		// Every third input is a nested Parquet file; 7 has no factor in common with the number of bases.
		n := 7 * i
		d := damage(all, n)
		if i%3 == 0 {
			d = damage(nestedOnly(all), n)
		}
		sweep("input "+strconv.Itoa(n), d)
	}
	t.Logf("%d inputs ended with 0, %d with 65", codes[0], codes[65])
	for name, b := range bombs(t) {
		began := time.Now()
		sweep("a bomb of "+strconv.Itoa(len(b))+" bytes", damaged{base{name: name, label: "grade"}, "unpacks to gigabytes", b})
		t.Logf("%s, %d bytes: %v", name, len(b), time.Since(began).Round(time.Millisecond))
	}
}

func nestedOnly(all []base) (nested []base) {
	for _, b := range all {
		if b.nested {
			nested = append(nested, b)
		}
	}
	return nested
}

// sweepDamaged gives the exit code and what was wrong about how the sweep ended.
func sweepDamaged(t *testing.T, program string, d damaged) (code int, fault string) {
	t.Helper()
	dir := t.TempDir()
	in := "in" + filepath.Ext(d.base.name)
	if err := os.WriteFile(filepath.Join(dir, in), d.bytes, 0o666); err != nil {
		t.Fatal(err)
	}
	var said bytes.Buffer
	c := exec.Command(program, "sweep", in, "--label", d.base.label, "--memory", commandMemory, "--out", "out"+filepath.Ext(d.base.name),
		"--unreadable", "unreadable.jsonl")
	c.Dir, c.Stderr = dir, &said
	alarm := time.AfterFunc(commandTime, func() { _ = c.Process.Kill() })
	err := c.Run()
	if !alarm.Stop() {
		return -1, fmt.Sprintf("no end after %v", commandTime)
	}
	if exit := (*exec.ExitError)(nil); err != nil && !errors.As(err, &exit) {
		t.Fatal(err)
	}
	code = c.ProcessState.ExitCode()
	_, missing := os.Stat(filepath.Join(dir, "out"+filepath.Ext(d.base.name)))
	parts, _ := filepath.Glob(filepath.Join(dir, ".*"))
	switch {
	case len(parts) > 0:
		return code, fmt.Sprintf("left half written: %v", parts)
	case code == 0 && missing == nil:
		if err := reread(filepath.Join(dir, "out"+filepath.Ext(d.base.name)), d.base.label); err != nil {
			return code, fmt.Sprintf("the output is not well formed: %v", err)
		}
		return code, ""
	case code != 65 || missing == nil:
		return code, fmt.Sprintf("ended with %d, output missing: %v\n%.2000s", code, missing != nil, said.String())
	}
	last := strings.TrimSpace(said.String())
	last = last[strings.LastIndex(last, "\n")+1:]
	if !strings.HasPrefix(last, "labelweir: "+in+": ") || strings.Contains(said.String(), "goroutine ") {
		return code, fmt.Sprintf("said\n%.2000s", said.String())
	}
	return code, ""
}

// bombs are files of up to a few megabytes that unpack to gigabytes.
func bombs(t *testing.T) map[string][]byte {
	t.Helper()
	const rows = 16 << 20
	zeros := memory.NewBufferBytes(make([]byte, 8*rows))
	numbers := array.NewData(arrow.PrimitiveTypes.Float64, rows, []*memory.Buffer{nil, zeros}, nil, 0, 0)
	defer numbers.Release()
	files := map[string][]byte{}
	for name, option := range map[string]ipc.Option{"zstd.arrow": ipc.WithZstd(), "lz4.arrow": ipc.WithLZ4()} {
		var fields []arrow.Field
		var cols []arrow.Array
		for i := range 16 {
			fields = append(fields, arrow.Field{Name: []string{"grade", "size_" + strconv.Itoa(i)}[min(i, 1)], Type: arrow.PrimitiveTypes.Float64})
			cols = append(cols, array.MakeFromData(numbers))
		}
		schema := arrow.NewSchema(fields, nil)
		rec := array.NewRecord(schema, cols, rows)
		path := filepath.Join(t.TempDir(), name)
		out, err := os.Create(path)
		if err != nil {
			t.Fatal(err)
		}
		w := ipc.NewWriter(out, ipc.WithSchema(schema), option)
		if err := errors.Join(w.Write(rec), w.Close(), out.Close()); err != nil {
			t.Fatal(err)
		}
		rec.Release()
		files[name] = read(t, path)
	}
	if os.Getenv("LABELWEIR_LONG") == "" {
		return files
	}
	files["pages.parquet"] = hugePages(t)
	files["line.csv"] = append([]byte("size,grade\n1,a\n2,\""), bytes.Repeat([]byte("long "), 14<<20)...)
	files["line.jsonl"] = append([]byte(`{"size":1,"grade":"a"}`+"\n"+`{"size":2,"grade":"`), bytes.Repeat([]byte("long "), 14<<20)...)
	return files
}

// hugePages is a Parquet file of columns of one page each, of zeros that unpack to 64 MB.
func hugePages(t *testing.T) []byte {
	t.Helper()
	const rows = 8 << 20
	numbers := array.NewData(arrow.PrimitiveTypes.Float64, rows, []*memory.Buffer{nil, memory.NewBufferBytes(make([]byte, 8*rows))}, nil, 0, 0)
	defer numbers.Release()
	var fields []arrow.Field
	var cols []arrow.Array
	for i := range 32 {
		fields = append(fields, arrow.Field{Name: []string{"grade", "size_" + strconv.Itoa(i)}[min(i, 1)], Type: arrow.PrimitiveTypes.Float64})
		cols = append(cols, array.MakeFromData(numbers))
	}
	schema := arrow.NewSchema(fields, nil)
	rec := array.NewRecord(schema, cols, rows)
	defer rec.Release()
	var out bytes.Buffer
	w, err := pqarrow.NewFileWriter(schema, &out, goparquet.NewWriterProperties(goparquet.WithDictionaryDefault(false),
		goparquet.WithCompression(compress.Codecs.Zstd), goparquet.WithDataPageSize(1<<30), goparquet.WithBatchSize(rows)), pqarrow.DefaultWriterProps())
	if err != nil {
		t.Fatal(err)
	}
	if err := errors.Join(w.Write(rec), w.Close()); err != nil {
		t.Fatal(err)
	}
	return out.Bytes()
}
