//go:build unix

package guard

import (
	"fmt"
	"os"
	"sync/atomic"
	"syscall"
)

// page is the parent's view of the shared memory.
type page struct {
	bytes []byte
	file  *os.File
}

// newPage makes a page that no other process can find. Its bytes are written, not only reserved: on a full disk a first
// store to a reserved one would end the process.
func newPage() (*page, *os.File, error) {
	f, err := os.CreateTemp("", "labelweir-")
	if err != nil {
		return nil, nil, err
	}
	_ = os.Remove(f.Name()) // the file lives on until it is closed
	if _, err := f.Write(make([]byte, pageBytes)); err != nil {
		f.Close()
		return nil, nil, err
	}
	b, err := syscall.Mmap(int(f.Fd()), 0, pageBytes, syscall.PROT_READ|syscall.PROT_WRITE, syscall.MAP_SHARED)
	if err != nil {
		f.Close()
		return nil, nil, fmt.Errorf("%s: no memory can be shared: %w", f.Name(), err)
	}
	return &page{b, f}, f, nil
}

func (p *page) free() {
	_ = syscall.Munmap(p.bytes)
	p.file.Close()
}

// openPage is the child's view of it.
func openPage(f *os.File) ([]byte, error) {
	if f == nil {
		return nil, os.ErrInvalid
	}
	defer f.Close()
	info, err := f.Stat()
	if err != nil {
		return nil, err
	}
	if info.Size() != pageBytes {
		return nil, os.ErrInvalid
	}
	return syscall.Mmap(int(f.Fd()), 0, pageBytes, syscall.PROT_READ|syscall.PROT_WRITE, syscall.MAP_SHARED)
}

// glance reads what changes all the time.
func glance(p []byte) (reading bool, marks uint64) {
	return p[atReading] != 0, atomic.LoadUint64(word(p, atMarks))
}
