package arrowfile

import (
	"path/filepath"
	"sync"
	"testing"

	"github.com/apache/arrow/go/v16/arrow/memory"

	"labelweir/connectors/table"
	"labelweir/filter"
)

// peaks notes the most memory that was out at one time.
type peaks struct {
	memory.Allocator
	mu        sync.Mutex
	now, most int
}

func (p *peaks) count(n int) {
	p.mu.Lock()
	defer p.mu.Unlock()
	p.now += n
	p.most = max(p.most, p.now)
}

func (p *peaks) Allocate(n int) []byte { p.count(n); return p.Allocator.Allocate(n) }
func (p *peaks) Reallocate(n int, b []byte) []byte {
	p.count(n - len(b))
	return p.Allocator.Reallocate(n, b)
}
func (p *peaks) Free(b []byte) { p.count(-len(b)); p.Allocator.Free(b) }

func TestMemoryDoesNotGrowWithTheInput(t *testing.T) {
	for _, x := range []struct {
		format Format
		tag    func(int64) filter.Tag
	}{
		{File, tagOf}, {Stream, tagOf}, // a row now and then is held back, and must not keep its record batch
		{File, func(row int64) filter.Tag { return filter.Tag{Divert: row%100 == 0} }},
	} {
		var most [2]int
		for k, n := range []int{10_000, 40_000} {
			in := filepath.Join(t.TempDir(), "in")
			var cuts []int
			for at := 200; at < n; at += 200 {
				cuts = append(cuts, at)
			}
			writeCrates(t, in, x.format, true, crates(n, 1), cuts)
			mem := &peaks{Allocator: memory.NewGoAllocator()}
			opt := table.Options{Memory: mem, BlockRows: 100, BlockBytes: 1 << 20}
			copyFile(t, open(t, in, filter.Record{Label: "grade"}, opt), outIn(t, ""), opt, x.tag)
			if most[k] = mem.most; most[k] == 0 {
				t.Fatal("nothing was counted")
			}
		}
		if float64(most[1]) > 1.2*float64(most[0]) {
			t.Errorf("%s: 10,000 rows take %d bytes at most, 40,000 take %d", x.format, most[0], most[1])
		}
	}
}
