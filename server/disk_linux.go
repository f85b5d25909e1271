package main

import (
	"path/filepath"
	"syscall"
)

// diskFree is the space left for the program on the disk of a file, bytes; -1
// when it is not known.
func diskFree(file string) int64 {
	var st syscall.Statfs_t
	if err := syscall.Statfs(filepath.Dir(file), &st); err != nil {
		return -1
	}
	return int64(st.Bavail) * st.Bsize
}
