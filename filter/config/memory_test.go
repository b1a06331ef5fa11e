package config

import (
	"math"
	"testing"
)

func TestTheMemoryLimitFollowsFromTheWindow(t *testing.T) {
	for _, c := range []struct{ bytes, set, want int64 }{
		{512 << 20, 0, 5 << 30},
		{1 << 30, 0, 8 << 30},
		{1 << 30, 300 << 20, 300 << 20},
	} {
		s := Default()
		s.Filter.Bytes, s.Input.Memory = c.bytes, c.set
		if got := s.MemoryLimit(); got != c.want {
			t.Errorf("window of %d, limit set to %d: got %d, want %d", c.bytes, c.set, got, c.want)
		}
	}
	s := Default()
	s.Filter.Bytes = math.MaxInt64
	if got := s.MemoryLimit(); got <= 0 {
		t.Errorf("a window of any size leaves %d", got)
	}
}
