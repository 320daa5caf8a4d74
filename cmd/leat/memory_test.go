package main

import (
	"math"
	"testing"
	"testing/fstest"
)

// The files are those of the kernel's documentation: admin-guide/cgroup-v2 (memory.max, "max" for none) and cgroup-v1/memory (limit_in_bytes,
// a multiple of the page next below 2^63 for none).
func TestGroupMemory(t *testing.T) {
	file := func(text string) *fstest.MapFile { return &fstest.MapFile{Data: []byte(text)} }
	for name, row := range map[string]struct {
		files fstest.MapFS
		want  int64
	}{
		"no cgroups":                    {fstest.MapFS{}, math.MaxInt64},
		"version 2 in a container":      {fstest.MapFS{"proc/self/cgroup": file("0::/\n"), "sys/fs/cgroup/memory.max": file("134217728\n")}, 128 << 20},
		"version 2, no limit":           {fstest.MapFS{"proc/self/cgroup": file("0::/\n"), "sys/fs/cgroup/memory.max": file("max\n")}, math.MaxInt64},
		"version 2, a group above":      {fstest.MapFS{"proc/self/cgroup": file("0::/pods/leat\n"), "sys/fs/cgroup/pods/leat/memory.max": file("max\n"), "sys/fs/cgroup/pods/memory.max": file("1048576\n")}, 1 << 20},
		"version 2, a path of the host": {fstest.MapFS{"proc/self/cgroup": file("0::/../../pods/x\n"), "sys/fs/cgroup/memory.max": file("4096\n")}, 4096},
		"version 1":                     {fstest.MapFS{"proc/self/cgroup": file("11:cpu,cpuacct:/a\n5:memory:/a\n0::/\n"), "sys/fs/cgroup/memory/a/memory.limit_in_bytes": file("268435456\n"), "sys/fs/cgroup/memory/memory.limit_in_bytes": file("9223372036854771712\n")}, 256 << 20},
		"version 1, no limit":           {fstest.MapFS{"proc/self/cgroup": file("5:memory:/\n"), "sys/fs/cgroup/memory/memory.limit_in_bytes": file("9223372036854771712\n")}, math.MaxInt64},
		"nonsense":                      {fstest.MapFS{"proc/self/cgroup": file("nonsense\n0::/\n"), "sys/fs/cgroup/memory.max": file("-1\n")}, math.MaxInt64},
	} {
		if got := groupMemory(row.files); got != row.want {
			t.Errorf("%s: %d, want %d", name, got, row.want)
		}
	}
}

func TestGivenMemoryLimitIsLeftAlone(t *testing.T) {
	if got := limitMemory([]string{"GOMEMLIMIT=1GiB"}); got != 0 {
		t.Errorf("limit %d", got)
	}
}
