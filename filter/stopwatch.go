package filter

import (
	"slices"
	"strings"
	"sync"
	"time"
)

// stopwatch adds up the time that each phase takes. Any goroutine may use it.
type stopwatch struct {
	clock func() time.Time

	mu    sync.Mutex // guards what follows
	spent map[string]time.Duration
	fit   string    // phase of the fit that is running; empty: none
	since time.Time // when it began
}

func newStopwatch(clock func() time.Time) *stopwatch {
	return &stopwatch{clock: clock, spent: map[string]time.Duration{}}
}

func (s *stopwatch) now() time.Time { return s.clock() }

// add counts the time since start for the phase.
func (s *stopwatch) add(phase string, start time.Time) {
	d := s.clock().Sub(start)
	s.mu.Lock()
	s.spent[phase] += d
	s.mu.Unlock()
}

// enter tells that the fit is now in the named phase; an empty one ends it.
func (s *stopwatch) enter(phase string) {
	now := s.clock()
	s.mu.Lock()
	defer s.mu.Unlock()
	if phase == s.fit {
		return
	}
	if s.fit != "" {
		s.spent[s.fit] += now.Sub(s.since)
	}
	s.fit, s.since = phase, now
}

// phases lists what was added up: read, the phases of the fit by name, score, write.
func (s *stopwatch) phases() []Spent {
	s.mu.Lock()
	defer s.mu.Unlock()
	list := []Spent{}
	for phase, d := range s.spent {
		list = append(list, Spent{Phase: phase, Seconds: d.Seconds()})
	}
	rank := func(phase string) int {
		switch {
		case phase == "read":
			return 0
		case phase == "score":
			return 2
		case phase == "write":
			return 3
		}
		return 1
	}
	slices.SortFunc(list, func(a, b Spent) int {
		if d := rank(a.Phase) - rank(b.Phase); d != 0 {
			return d
		}
		return strings.Compare(a.Phase, b.Phase)
	})
	return list
}
