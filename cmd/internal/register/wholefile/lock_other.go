//go:build !unix

package wholefile

import "os"

// lock does nothing here: such a system has no advisory locks of this kind.
func lock(*os.File) error { return nil }
