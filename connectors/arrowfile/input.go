package arrowfile

import (
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/ipc"
)

// input is an open file, read one record batch after the other.
type input struct {
	path string
	file *os.File
	msgs *messages
	rd   *ipc.Reader

	dicts, lastDicts map[arrow.ArrayData]bool // dictionaries of this record batch and the one before: checked already
}

// openInput opens path and reads its schema.
func openInput(path string, opt Options) (in *input, err error) {
	f, err := os.Open(path)
	if err != nil {
		return nil, cantOpen(path, err)
	}
	defer func() {
		if err != nil {
			f.Close()
		}
	}()
	info, err := f.Stat()
	if err != nil {
		return nil, cantOpen(path, err)
	}
	if !info.Mode().IsRegular() {
		return nil, &Error{Path: path, What: "is not a regular file", Do: "copy the input into a file first: it may be read twice", Kind: ErrUnreadable}
	}
	if info.Size() == 0 {
		return nil, &Error{Path: path, What: "is empty: zero bytes", Do: "check the step that wrote it", Kind: ErrUnreadable}
	}
	in = &input{path: path, file: f}
	mem := capped{opt.mem, mostBytes(info.Size())}
	if in.msgs, err = newMessages(f, info.Size()); err != nil {
		if errors.Is(err, errNotArrow) {
			return nil, &Error{Path: path, What: "is neither an Arrow IPC file nor an Arrow IPC stream", Do: otherFormat(path), Kind: ErrUnreadable}
		}
		return nil, in.damaged("its layout can't be read", err)
	}
	if in.rd, err = ipc.NewReaderFromMessageReader(in.msgs, ipc.WithAllocator(mem)); err != nil {
		in.msgs.Release()
		return nil, in.damaged("its schema can't be read", err)
	}
	return in, nil
}

// cantOpen says what to do about a file that does not open.
func cantOpen(path string, err error) error {
	var pe *fs.PathError
	if errors.As(err, &pe) {
		err = pe.Err
	}
	e := &Error{Path: path, What: "can't be opened", Kind: ErrUnreadable, Err: err}
	switch {
	case errors.Is(err, fs.ErrNotExist):
		e.What, e.Do, e.Err = "there is no such file", "check the path", quiet{fs.ErrNotExist}
	case errors.Is(err, fs.ErrPermission):
		e.Do = "check its permissions"
	}
	return e
}

// otherFormat guesses from the name what the file is instead.
func otherFormat(path string) string {
	switch filepath.Ext(path) {
	case ".parquet", ".csv", ".json", ".jsonl", ".ndjson":
		return "convert it to Arrow IPC (pyarrow: pyarrow.feather.write_feather(table, path, version=2))"
	}
	return "check that the path is the right one"
}

func (in *input) damaged(what string, err error) error {
	e := &Error{Path: in.path, What: what, Do: "the file is damaged or cut short: write it again", Kind: ErrUnreadable, Err: err}
	if in.msgs != nil {
		e.Batch = in.msgs.at
	}
	return e
}

// next gives the next record batch, which the caller releases, or io.EOF.
func (in *input) next() (rec arrow.Record, err error) {
	defer func() {
		if p := recover(); p != nil {
			rec, err = nil, in.damaged("its bytes make no sense", caught(p))
		}
	}()
	if !in.rd.Next() {
		if err := in.rd.Err(); err != nil {
			return nil, in.damaged("the record batch can't be read", err)
		}
		if n := in.msgs.missing(); n > 0 {
			return nil, in.damaged(fmt.Sprintf("%d record batches are missing", n), io.ErrUnexpectedEOF)
		}
		return nil, io.EOF
	}
	rec = in.rd.Record()
	if err := in.validate(rec); err != nil {
		return nil, err
	}
	rec.Retain()
	return rec, nil
}

// close gives everything back but the record batches handed out.
func (in *input) close() error {
	in.rd.Release()
	in.msgs.body = nil
	return in.file.Close()
}

// quiet is a cause without a text of its own: the sentence before it says it already.
type quiet struct{ error }

func (quiet) Error() string   { return "" }
func (q quiet) Unwrap() error { return q.error }
