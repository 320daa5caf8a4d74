//go:build unix

package wholefile

import (
	"os"
	"syscall"
)

// lock keeps a file for this process until it is closed, and fails where another has it.
func lock(file *os.File) error {
	return syscall.Flock(int(file.Fd()), syscall.LOCK_EX|syscall.LOCK_NB)
}
