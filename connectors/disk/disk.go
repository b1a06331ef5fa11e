// Package disk is the part of a file system that writing a table needs, small enough to be made to fail in tests.
package disk

import (
	"io"
	"io/fs"
	"os"
)

// FS is the file system.
type FS interface {
	// Create makes a new file for writing; it must not exist.
	Create(path string) (File, error)
	// Rename gives a file its final name, over whatever has it.
	Rename(from, to string) error
	// Remove deletes a file.
	Remove(path string) error
	// Stat follows links.
	Stat(path string) (fs.FileInfo, error)
	// SyncDir makes names that changed in a folder durable.
	SyncDir(dir string) error
}

// File is a file being written.
type File interface {
	io.Writer
	Sync() error
	Close() error
}

// OS is the machine's own file system.
type OS struct{}

// Create implements FS.
func (OS) Create(path string) (File, error) {
	f, err := os.OpenFile(path, os.O_WRONLY|os.O_CREATE|os.O_EXCL, 0o666)
	if err != nil {
		return nil, err // a nil *os.File must not become a File
	}
	return f, nil
}

// Rename implements FS.
func (OS) Rename(from, to string) error { return os.Rename(from, to) }

// Remove implements FS.
func (OS) Remove(path string) error { return os.Remove(path) }

// Stat implements FS.
func (OS) Stat(path string) (fs.FileInfo, error) { return os.Stat(path) }

// SyncDir implements FS.
func (OS) SyncDir(dir string) error {
	d, err := os.Open(dir)
	if err != nil {
		return err
	}
	err = d.Sync()
	if e := d.Close(); err == nil {
		err = e
	}
	return err
}
