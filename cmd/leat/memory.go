package main

import (
	"io/fs"
	"math"
	"os"
	"path"
	"runtime/debug"
	"strconv"
	"strings"
)

// memoryShare is how much of its cgroup's memory the Go runtime is told to stay within. The rest is for what it does not count: the binary, page
// tables, the kernel's buffers of sockets and of the spool.
const memoryShare = 0.85

// limitMemory has the garbage collector work harder before the kernel kills the process, and returns the limit, 0 for none. GOMEMLIMIT, where it is set,
// holds instead.
func limitMemory(environment []string) int64 {
	for _, pair := range environment {
		if value, found := strings.CutPrefix(pair, "GOMEMLIMIT="); found && value != "" {
			return 0
		}
	}
	most := groupMemory(os.DirFS("/"))
	if most == math.MaxInt64 {
		return 0
	}
	limit := int64(memoryShare * float64(most))
	debug.SetMemoryLimit(limit)
	return limit
}

// groupMemory is the least memory limit of the process's cgroup and those around it, from the files of a root; math.MaxInt64 where there is none.
// In a container the group's own folder is often the root of what is mounted, so that the path that the process has on the host leads nowhere.
func groupMemory(root fs.FS) int64 {
	least := int64(math.MaxInt64)
	groups, _ := fs.ReadFile(root, "proc/self/cgroup")
	for line := range strings.Lines(string(groups)) {
		parts := strings.SplitN(strings.TrimSpace(line), ":", 3) // number, controllers, path
		if len(parts) != 3 {
			continue
		}
		base, file := "sys/fs/cgroup", "memory.max" // version 2
		if parts[1] != "" {
			if !strings.Contains(","+parts[1]+",", ",memory,") {
				continue
			}
			base, file = "sys/fs/cgroup/memory", "memory.limit_in_bytes" // version 1
		}
		for folder := path.Clean("/" + parts[2]); ; folder = path.Dir(folder) {
			if text, err := fs.ReadFile(root, path.Join(base, folder, file)); err == nil {
				if n, err := strconv.ParseInt(strings.TrimSpace(string(text)), 10, 64); err == nil && n > 0 && n < 1<<60 {
					least = min(least, n) // version 1 says about 1<<63 for no limit, version 2 the word max
				}
			}
			if folder == "/" {
				break
			}
		}
	}
	return least
}
