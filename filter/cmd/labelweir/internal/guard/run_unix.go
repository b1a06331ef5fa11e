//go:build unix

package guard

import (
	"errors"
	"fmt"
	"os"
	"os/exec"
	"os/signal"
	"runtime"
	"strconv"
	"syscall"
	"time"
)

// Supported tells whether this system has what a guard needs.
const Supported = true

// Command is a child to be run.
type Command struct {
	Args  []string      // the program's, with its own name first
	Bytes int64         // how much more address space than at its start the child may take
	Hang  time.Duration // how long the child may compute while it reads, and get nowhere
	Grace time.Duration // how long the child may take to end after a signal
	Err   *os.File      // what people read
	Made  func(pid int) // if set, called once the child runs
}

// tick is the pause between two looks at the child.
const tick = 100 * time.Millisecond

// Run starts this program again as a child and waits until it has ended. Standard input and output are the child's as
// they are; SIGINT and SIGTERM are passed on, and a second one ends it at once. It returns the child's exit code and a
// nil Death when the child ended by itself. The error says that no child could be started.
func Run(c Command) (code int, pid int, d *Death, err error) {
	// The child's death signal is bound to the thread that started it.
	runtime.LockOSThread()
	defer runtime.UnlockOSThread()
	signals := make(chan os.Signal, 2) // one to pass on, one to end it
	signal.Notify(signals, os.Interrupt, syscall.SIGTERM)
	defer signal.Stop(signals)
	page, shared, err := newPage()
	if err != nil {
		return 0, 0, nil, err
	}
	defer page.free()
	alive, life, err := os.Pipe()
	if err != nil {
		return 0, 0, nil, err
	}
	defer life.Close()
	words := &kept{}
	cmd := &exec.Cmd{
		Path: self(), Args: c.Args, Stdin: os.Stdin, Stdout: os.Stdout, Stderr: words,
		Env:         append(os.Environ(), variable+"="+strconv.FormatInt(c.Bytes, 10)),
		ExtraFiles:  []*os.File{c.Err, alive, shared},
		SysProcAttr: attributes(),
		WaitDelay:   time.Second, // somebody else may hold the pipe of last words open
	}
	err = cmd.Start()
	alive.Close()
	if err != nil {
		return 0, 0, nil, fmt.Errorf("no second process can be started: %w", err)
	}
	if c.Made != nil {
		c.Made(cmd.Process.Pid)
	}
	w := &watch{command: c, process: cmd.Process, page: page.bytes, signals: signals}
	ended := make(chan error, 1) // the goroutine never waits for its reader
	go func() { ended <- cmd.Wait() }()
	err = w.until(ended)
	code, d, err = w.verdict(cmd.ProcessState, words.text, err)
	return code, cmd.Process.Pid, d, err
}

// watch follows one child.
type watch struct {
	command Command
	process *os.Process
	page    []byte
	signals <-chan os.Signal

	passed  os.Signal     // the first signal passed on
	killed  bool          // by us
	hung    bool          // because it got nowhere
	stalled time.Duration // computing without a mark while reading
}

// until waits for the child's end, passes signals on, and ends a child that hangs.
func (w *watch) until(ended <-chan error) error {
	clock := time.NewTicker(tick)
	defer clock.Stop()
	var deadline <-chan time.Time
	before := w.state()
	for {
		select {
		case err := <-ended:
			return err
		case s := <-w.signals:
			if w.passed != nil {
				w.kill()
				continue
			}
			w.passed = s
			_ = w.process.Signal(s) // it may have ended just now
			deadline = time.After(w.command.Grace)
		case <-deadline:
			w.kill()
		case <-clock.C:
			now := w.state()
			if w.stall(before, now); w.stalled >= w.command.Hang && !w.killed {
				w.hung = true
				w.kill()
			}
			before = now
		}
	}
}

func (w *watch) kill() {
	w.killed = true
	_ = w.process.Kill()
}

// state is what a look at the child shows.
type state struct {
	reading bool
	marks   uint64
	used    time.Duration // of processor time, or of any where that can't be told
}

func (w *watch) state() state {
	reading, marks := glance(w.page)
	return state{reading, marks, used(w.process.Pid)}
}

// stall counts the time in which the child computes, reads and makes no mark. A reader that waits for its input takes
// no processor time, and what was stopped and goes on has not hung.
func (w *watch) stall(before, now state) {
	if !now.reading || now.marks != before.marks {
		w.stalled = 0
		return
	}
	w.stalled += max(0, min(now.used-before.used, tick)) // several threads don't make it later
}

// verdict tells from the child's state and its last words how it ended.
func (w *watch) verdict(s *os.ProcessState, words []byte, err error) (code int, d *Death, _ error) {
	var exit *exec.ExitError
	if err != nil && !errors.As(err, &exit) && !errors.Is(err, exec.ErrWaitDelay) {
		return 0, nil, err
	}
	status, _ := s.Sys().(syscall.WaitStatus)
	d = &Death{Trace: words, At: look(w.page)}
	cause, line, spoken := causeOf(words)
	switch {
	case w.hung && spoken: // it was still saying why it dies
		d.Cause, d.Text = cause, line
	case w.hung:
		d.Cause, d.After = OfHang, w.command.Hang
	case w.killed:
		d.Cause, d.Signal = OfDeafness, w.passed
	case status.Signaled():
		d.Cause, d.Signal = OfSignal, status.Signal()
	case spoken && s.ExitCode() == 2: // the code of a Go program that dies
		d.Cause, d.Text = cause, line
	default:
		return s.ExitCode(), nil, nil
	}
	return 0, d, nil
}
