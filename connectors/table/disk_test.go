package table_test

import (
	"os"
	"path/filepath"
	"strings"
	"syscall"
	"testing"

	"labelweir/connectors/disk"
)

// Whatever call of the disk fails: nothing stands under the output's name, and the error names it.
func TestNoFormatLeavesAHalfFile(t *testing.T) {
	rows := "x,note,label\n" + strings.Repeat("1,\"a, b\",extra\n2,c,juice\n", 200)
	for _, ext := range []string{".arrow", ".arrows", ".parquet", ".csv", ".jsonl"} {
		t.Run(ext, func(t *testing.T) {
			fired := 0
			for n := 0; ; n++ {
				dir := t.TempDir()
				in, out := put(t, filepath.Join(dir, "in.csv"), rows), filepath.Join(dir, "out"+ext)
				d := &disk.Failing{FS: disk.OS{}, Err: syscall.ENOSPC, At: n, Stays: true}
				opt := options()
				opt.BlockRows, opt.Disk = 100, d
				err := carry(in, out, opt)
				call, path, ok := d.Fired()
				if !ok {
					if err != nil {
						t.Errorf("without a failure: %v", err)
					}
					break
				}
				fired++
				if path == in && err == nil {
					continue // only the check whether input and output are the same file is left out
				}
				if err == nil || !strings.Contains(err.Error(), "out"+ext) || !strings.Contains(err.Error(), "disk is full") {
					t.Errorf("call %d, %s fails: got %v", n, call, err)
				}
				if list, err := os.ReadDir(dir); err != nil || len(list) != 1 && call != "remove" {
					t.Errorf("call %d, %s fails: left are %v, %v", n, call, list, err)
				}
			}
			if fired < 6 {
				t.Errorf("only %d calls could fail", fired)
			}
		})
	}
}
