// Package term writes for people who watch a terminal.
package term

import "os"

// Is tells whether f is a terminal: a character device other than the null device.
func Is(f *os.File) bool {
	info, err := f.Stat()
	if err != nil || info.Mode()&os.ModeCharDevice == 0 {
		return false
	}
	null, err := os.Stat(os.DevNull)
	return err != nil || !os.SameFile(info, null)
}
