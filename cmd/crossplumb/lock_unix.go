//go:build unix

package main

import (
	"fmt"
	"os"
	"path/filepath"
	"syscall"
)

// lockFolder keeps a second server off the folder: two would each believe to be the only writer, and each would judge
// and invite by itself. The lock goes with the process, however it ends.
func lockFolder(folder string) (unlock func(), err error) {
	f, err := os.OpenFile(filepath.Join(folder, "lock"), os.O_CREATE|os.O_RDWR, 0o600)
	if err != nil {
		return nil, err
	}
	if err := syscall.Flock(int(f.Fd()), syscall.LOCK_EX|syscall.LOCK_NB); err != nil {
		f.Close()
		return nil, fmt.Errorf("another crossplumb runs on %s", folder)
	}
	return func() { f.Close() }, nil
}
