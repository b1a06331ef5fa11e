package guard

import (
	"encoding/binary"
	"sync"
	"sync/atomic"
	"unsafe"
)

// Place is where the child was.
type Place struct {
	Reading bool   // inside of bytes that may be damaged
	File    string // the file being read
	Unit    string // what Batch counts: record batch, row group, line
	Batch   int64  // counted from 1; 0: not known
	Column  string // empty: not known
	Phase   string // what the sweep was doing
}

// The page: two words that change, and four texts of a fixed room, each behind its length in two bytes.
//
//	0 marks made   8 reading, 0 or 1   16 batch   24 file   1050 column   1564 unit   1598 phase
const (
	atMarks   = 0
	atReading = 8
	atBatch   = 16
	atFile    = 24
	atColumn  = atFile + 2 + roomFile
	atUnit    = atColumn + 2 + roomColumn
	atPhase   = atUnit + 2 + roomUnit
	pageBytes = 4096

	roomFile   = 1024
	roomColumn = 512
	roomUnit   = 32
	roomPhase  = 64
)

// Marks notes where this process is, for the parent to read. It may be used from several goroutines; the nil Marks notes
// nothing. A mark costs some tens of nanoseconds and no system call.
type Marks struct {
	mu   sync.Mutex // guards page
	page []byte
}

// Enter notes that bytes of file are being read from now on.
func (m *Marks) Enter(file string) {
	m.note(func(p []byte) { putText(p, atFile, roomFile, file); p[atReading] = 1 })
}

// Resume is Enter for the file and the place noted last.
func (m *Marks) Resume() {
	m.note(func(p []byte) { p[atReading] = 1 })
}

// Leave ends what Enter or Resume began.
func (m *Marks) Leave() {
	m.note(func(p []byte) { p[atReading] = 0 })
}

// At notes the file and the batch being read, counted from 1, of what unit says, and the column within it, or none.
func (m *Marks) At(file, unit string, batch int64, column string) {
	m.note(func(p []byte) {
		putText(p, atFile, roomFile, file)
		binary.NativeEndian.PutUint64(p[atBatch:], uint64(batch))
		putText(p, atUnit, roomUnit, unit)
		putText(p, atColumn, roomColumn, column)
	})
}

// Phase notes what is being done.
func (m *Marks) Phase(name string) {
	m.note(func(p []byte) { putText(p, atPhase, roomPhase, name) })
}

func (m *Marks) note(change func(page []byte)) {
	if m == nil {
		return
	}
	m.mu.Lock()
	defer m.mu.Unlock()
	change(m.page)
	atomic.AddUint64(word(m.page, atMarks), 1)
}

// word is the number at an offset that is a multiple of 8; a page begins at one.
func word(page []byte, at int) *uint64 { return (*uint64)(unsafe.Pointer(&page[at])) }

func putText(p []byte, at, room int, text string) {
	n := copy(p[at+2:at+2+room], text)
	binary.NativeEndian.PutUint16(p[at:], uint16(n))
}

func text(p []byte, at, room int) string {
	n := min(int(binary.NativeEndian.Uint16(p[at:])), room)
	return string(p[at+2 : at+2+n])
}

// look reads the page. While the child lives, only reading and marks are to be trusted.
func look(p []byte) Place {
	return Place{
		Reading: p[atReading] != 0,
		File:    text(p, atFile, roomFile),
		Unit:    text(p, atUnit, roomUnit),
		Batch:   int64(binary.NativeEndian.Uint64(p[atBatch:])),
		Column:  text(p, atColumn, roomColumn),
		Phase:   text(p, atPhase, roomPhase),
	}
}
