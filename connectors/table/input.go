package table

import (
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
)

// Input is one file of the input. It must be a regular file: it may be read several times.
type Input struct {
	Path  string
	Title string   // what messages call it; empty: Path
	File  *os.File // what to read when it is open already; it stays open. Nil: the file at Path
}

func (in Input) title() string {
	if in.Title != "" {
		return in.Title
	}
	return in.Path
}

// input is the files of one input, read one record batch after the other.
type input struct {
	files []Input
	opt   Options
	text  []string      // see ReadOptions.Text
	like  *arrow.Schema // see ReadOptions.Like

	at     int // the open file's index
	file   *os.File
	rd     Reader
	format *Format
	schema *arrow.Schema // of the first file

	before     int64 // rows of the files before
	rows       int64 // rows of this file
	done, size int64 // bytes of the files before and of all
}

// openInput opens the first of the files.
func openInput(files []Input, text []string, like *arrow.Schema, opt Options) (*input, error) {
	in := &input{files: files, opt: opt, text: text, like: like}
	if len(files) == 0 {
		return nil, &Error{Path: "input", What: "no file is named", Do: "name one", Kind: ErrUnreadable}
	}
	for _, f := range files {
		stat := func() (fs.FileInfo, error) { return os.Stat(f.Path) }
		if f.File != nil {
			stat = f.File.Stat
		}
		if info, err := stat(); err == nil {
			in.size += info.Size()
		}
	}
	if err := in.open(); err != nil {
		return nil, err
	}
	in.schema = in.rd.Schema()
	return in, nil
}

// open opens the file at.
func (in *input) open() (err error) {
	at := in.files[in.at]
	file := at.File
	if file == nil {
		if file, err = os.Open(at.Path); err != nil {
			return cantOpen(at.title(), err)
		}
		defer func() {
			if err != nil {
				file.Close()
			}
		}()
	}
	size, err := sizeOfFile(file, at.title())
	if err != nil {
		return err
	}
	f := File{ReaderAt: file, Path: at.title(), Size: size}
	format, err := formatOf(f, at.Path, in.opt)
	if err != nil {
		return err
	}
	rd, err := format.Open(f, ReadOptions{Rows: in.opt.Rows, Peek: in.opt.Peek, Like: in.like, Text: in.text,
		Unreadable: in.opt.Unreadable, Delimiter: in.opt.Delimiter, MostRow: in.opt.MostRow,
		MostBatch: in.opt.MostBatch, Mark: in.opt.Mark, Memory: in.opt.Memory})
	if err != nil {
		return err
	}
	in.file, in.rd, in.format = file, rd, format
	return nil
}

// sizeOfFile refuses files that can't be read twice and those without a byte.
func sizeOfFile(f *os.File, title string) (int64, error) {
	info, err := f.Stat()
	switch {
	case err != nil:
		return 0, cantOpen(title, err)
	case !info.Mode().IsRegular():
		return 0, &Error{Path: title, What: "is not a regular file", Do: "copy the input into a file first: it may be read twice", Kind: ErrUnreadable}
	case info.Size() == 0:
		return 0, &Error{Path: title, What: "is empty: zero bytes", Do: "check the step that wrote it", Kind: ErrUnreadable}
	}
	return info.Size(), nil
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

// next gives the next record batch, which the caller releases, or io.EOF after the last of the last file.
func (in *input) next() (arrow.Record, error) {
	for {
		if in.rd == nil {
			return nil, &Error{Path: in.title(), What: "read after a fault", Kind: ErrClosed}
		}
		rec, err := in.rd.Next()
		if err == nil {
			in.rows += rec.NumRows()
			return in.recast(rec), nil
		}
		if err != io.EOF || in.at+1 == len(in.files) {
			return nil, err
		}
		if err := in.follow(); err != nil {
			return nil, err
		}
	}
}

// recast gives the record batch of a later file the schema of the first: metadata may differ.
func (in *input) recast(rec arrow.Record) arrow.Record {
	if in.at == 0 {
		return rec
	}
	defer rec.Release()
	return array.NewRecord(in.schema, rec.Columns(), rec.NumRows())
}

// follow goes on to the next file, which must have the columns of the first.
func (in *input) follow() error {
	_, size := in.rd.Progress()
	if err := in.close(); err != nil {
		return err
	}
	in.done += size
	in.before, in.rows = in.before+in.rows, 0
	in.at++
	in.like = in.schema
	if err := in.open(); err != nil {
		return err
	}
	return in.alike()
}

// alike tells whether the open file has the columns of the first.
func (in *input) alike() error {
	first, now := visible(in.schema), visible(in.rd.Schema())
	name := in.files[0].title()
	for i, f := range now {
		if i >= len(first) {
			return in.unlike(f.Name, "is not in "+name)
		}
		switch g := first[i]; {
		case f.Name != g.Name:
			return in.unlike(f.Name, fmt.Sprintf("stands where %s has %q", name, g.Name))
		case !arrow.TypeEqual(f.Type, g.Type):
			return in.unlike(f.Name, fmt.Sprintf("has type %s, but %s in %s", f.Type, g.Type, name))
		case f.Nullable && !g.Nullable:
			return in.unlike(f.Name, "may have nulls here, but not in "+name)
		}
	}
	if n := len(now); n < len(first) {
		return in.unlike(first[n].Name, "is in "+name+", but not here")
	}
	if rawFormat(in.schema) != rawFormat(in.rd.Schema()) {
		return &Error{Path: in.title(), What: "has another format than " + name, Do: "sweep files of different formats one by one", Kind: ErrColumn}
	}
	return nil
}

func (in *input) unlike(column, what string) error {
	return &Error{Path: in.title(), Column: column, What: what, Do: "sweep files of different columns one by one", Kind: ErrColumn}
}

// title is what messages call the open file.
func (in *input) title() string { return in.files[in.at].title() }

// place is where the record batch read last stands.
func (in *input) place() Place {
	if in.rd == nil {
		return Place{Path: in.title()}
	}
	return in.rd.Place()
}

// damaged says that what was read last makes no sense.
func (in *input) damaged(what string, err error) error {
	return At(in.place(), ErrUnreadable, what, "the file is damaged or cut short: write it again", err)
}

// progress tells how many bytes of how many have been read.
func (in *input) progress() (done, size int64) {
	if in.rd == nil {
		return in.done, in.size
	}
	done, _ = in.rd.Progress()
	return in.done + done, in.size
}

// manner is how the open file was written, nil when its format does not say.
func (in *input) manner() any {
	if m, ok := in.rd.(Manner); ok {
		return m.Manner()
	}
	return nil
}

// close closes the open file; a second call does nothing.
func (in *input) close() error {
	if in.rd == nil {
		return nil
	}
	err := in.rd.Close()
	if in.file != in.files[in.at].File {
		err = errors.Join(err, in.file.Close())
	}
	in.rd = nil
	return err
}

// quiet is a cause without a text of its own: the sentence before it says it already.
type quiet struct{ error }

func (quiet) Error() string   { return "" }
func (q quiet) Unwrap() error { return q.error }
