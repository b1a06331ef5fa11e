//go:build linux

package guard

import (
	"bufio"
	"errors"
	"fmt"
	"io"
	"math"
	"os"
	"os/exec"
	"os/signal"
	"strconv"
	"strings"
	"syscall"
	"testing"
	"time"
)

// TestMain lets this test binary play the guarded program: a first argument "act" makes it do as the second one says.
// With "parent" it is a guard around such a child, so that the guard itself can be killed.
func TestMain(m *testing.M) {
	if len(os.Args) > 2 && os.Args[1] == "act" {
		act(os.Args[2])
	}
	if len(os.Args) > 2 && os.Args[1] == "parent" {
		c := command(os.Args[2])
		c.Made = func(pid int) { fmt.Println("child", pid) }
		code, _, d, err := Run(c)
		if d != nil && d.Cause == OfDeafness {
			code = 77
		}
		fmt.Println("ended", code, err)
		os.Exit(code)
	}
	os.Exit(m.Run())
}

func command(what string) Command {
	return Command{Args: []string{os.Args[0], "act", what}, Bytes: 256 << 20, Hang: 300 * time.Millisecond,
		Grace: 300 * time.Millisecond, Err: os.Stderr}
}

var sink [][]byte

// act is the child.
func act(what string) {
	c, err := Join()
	if err != nil || c == nil {
		fmt.Println(err)
		os.Exit(99)
	}
	switch kind, rest, _ := strings.Cut(what, ":"); kind {
	case "exit":
		n, _ := strconv.Atoi(rest)
		os.Exit(n)
	case "say":
		fmt.Fprint(c.Err, rest)
	case "where":
		c.Marks.Phase("read")
		c.Marks.Enter("apples.arrow")
		c.Marks.At("apples.arrow", "record batch", 3, "blush")
		greed()
	case "memory":
		greed()
	case "stack":
		c.Marks.Enter("apples.arrow")
		fmt.Fprint(c.Err, deep(1, math.MaxInt))
	case "panic":
		panic(errors.New("a table without legs"))
	case "spin":
		last := 2 * time.Second
		if rest == "reading" {
			c.Marks.Enter("apples.arrow")
			last = time.Minute // on a busy machine it takes long to compute for the time of a hang
		}
		for end := time.Now().Add(last); time.Now().Before(end); {
		}
	case "busy": // computing with marks
		for end := time.Now().Add(time.Second); time.Now().Before(end); {
			c.Marks.Enter("apples.arrow")
		}
	case "wait": // reading, but waiting for input
		c.Marks.Enter("apples.arrow")
		<-time.After(time.Second)
	case "kill":
		c.Marks.Enter("apples.arrow")
		_ = syscall.Kill(os.Getpid(), syscall.SIGKILL)
	case "obey":
		signals := make(chan os.Signal, 1)
		signal.Notify(signals, syscall.SIGTERM)
		fmt.Fprintln(c.Err, "ready")
		<-signals
		os.Exit(143)
	case "deaf":
		signal.Ignore(syscall.SIGTERM, syscall.SIGINT)
		fmt.Fprintln(c.Err, "ready")
		<-time.After(time.Minute)
	case "orphan":
		signal.Ignore(syscall.SIGTERM)
		fmt.Fprintln(c.Err, "ready")
		<-c.Orphan
		os.Exit(0)
	}
	os.Exit(0)
}

func greed() {
	for {
		b := make([]byte, 16<<20)
		for i := 0; i < len(b); i += 4096 {
			b[i] = 1
		}
		sink = append(sink, b)
	}
}

func deep(n, end int) int {
	if n == end {
		return 0
	}
	return deep(n+1, end) + n
}

func TestHowAChildEnds(t *testing.T) {
	for _, c := range []struct {
		what  string
		code  int
		cause Cause
		at    Place
		text  string
	}{
		{what: "exit:0"},
		{what: "exit:65", code: 65},
		{what: "exit:2", code: 2},
		{what: "memory", cause: OfMemory},
		{what: "where", cause: OfMemory, at: Place{Reading: true, File: "apples.arrow", Unit: "record batch", Batch: 3, Column: "blush", Phase: "read"}},
		{what: "stack", cause: OfStack, at: Place{Reading: true, File: "apples.arrow"}},
		{what: "panic", cause: OfPanic, text: "panic: a table without legs"},
		{what: "spin:reading", cause: OfHang, at: Place{Reading: true, File: "apples.arrow"}},
		{what: "spin:thinking"},
		{what: "busy"},
		{what: "wait"},
		{what: "kill", cause: OfSignal, at: Place{Reading: true, File: "apples.arrow"}},
	} {
		t.Run(c.what, func(t *testing.T) {
			t.Parallel()
			code, pid, d, err := Run(command(c.what))
			if err != nil || code != c.code {
				t.Fatalf("code %d, error %v", code, err)
			}
			if syscall.Kill(pid, 0) == nil {
				t.Errorf("process %d is still there", pid)
			}
			if c.cause == 0 {
				if d != nil {
					t.Errorf("it died: %s", d.How())
				}
				return
			}
			if d == nil {
				t.Fatal("it did not die")
			}
			if d.Cause != c.cause || d.At != c.at || d.Text != c.text {
				t.Errorf("it %s (%q), at %+v\n%.500s", d.How(), d.Text, d.At, d.Trace)
			}
		})
	}
}

// start runs a guard in a process of its own and waits until its child is ready.
func start(t *testing.T, what string) (cmd *exec.Cmd, child int, rest *bufio.Reader) {
	t.Helper()
	cmd = exec.Command(os.Args[0], "parent", what)
	r, w, err := os.Pipe()
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { r.Close() })
	cmd.Stdout, cmd.Stderr = w, w
	if err := cmd.Start(); err != nil {
		t.Fatal(err)
	}
	w.Close()
	rest = bufio.NewReader(r)
	for ready := false; child == 0 || !ready; { // in either order
		line, err := rest.ReadString('\n')
		if err != nil {
			t.Fatal(err)
		}
		_, _ = fmt.Sscanf(line, "child %d", &child)
		ready = ready || strings.HasPrefix(line, "ready")
	}
	return cmd, child, rest
}

func TestSignalsArePassedOn(t *testing.T) {
	for _, c := range []struct {
		what string
		code int
	}{{"obey", 143}, {"deaf", 77}} {
		t.Run(c.what, func(t *testing.T) {
			cmd, child, _ := start(t, c.what)
			began := time.Now()
			if err := cmd.Process.Signal(syscall.SIGTERM); err != nil {
				t.Fatal(err)
			}
			_ = cmd.Wait()
			if cmd.ProcessState.ExitCode() != c.code {
				t.Errorf("ended with %v", cmd.ProcessState)
			}
			if d := time.Since(began); d > 20*time.Second {
				t.Errorf("it took %v", d)
			}
			if syscall.Kill(child, 0) == nil {
				t.Errorf("process %d is still there", child)
			}
		})
	}
}

// TestTheChildEndsWithItsParent kills the guard. The child's output closes when the child has ended.
func TestTheChildEndsWithItsParent(t *testing.T) {
	for _, what := range []string{"orphan", "obey"} {
		t.Run(what, func(t *testing.T) {
			cmd, _, rest := start(t, what)
			if err := cmd.Process.Kill(); err != nil {
				t.Fatal(err)
			}
			_ = cmd.Wait()
			closed := make(chan error)
			go func() { _, err := io.Copy(io.Discard, rest); closed <- err }()
			select {
			case err := <-closed:
				if err != nil {
					t.Error(err)
				}
			case <-time.After(20 * time.Second):
				t.Error("the child lives on")
			}
		})
	}
}

func TestAProcessThatNobodyGuardsIsLeftAlone(t *testing.T) {
	if c, err := Join(); c != nil || err != nil {
		t.Errorf("got %v, %v", c, err)
	}
	cmd := exec.Command(os.Args[0], "act", "exit:0")
	cmd.Env = append(os.Environ(), variable+"=12") // which no parent has set
	if out, err := cmd.CombinedOutput(); cmd.ProcessState.ExitCode() != 99 || !strings.Contains(string(out), "unset it") {
		t.Errorf("got %v, %s", err, out)
	}
	var m *Marks
	m.Enter("apples.arrow")
	m.Leave()
}

func BenchmarkMark(b *testing.B) {
	m := &Marks{page: make([]byte, pageBytes)}
	b.ReportAllocs()
	for b.Loop() {
		m.At("apples.arrow", "record batch", 7, "diameter_mm")
	}
}
