//go:build unix

package main

import (
	"os"
	"syscall"
)

// lockFile takes a lock on f that ends with f or with the process. It does not wait.
func lockFile(f *os.File) error {
	return syscall.Flock(int(f.Fd()), syscall.LOCK_EX|syscall.LOCK_NB)
}
