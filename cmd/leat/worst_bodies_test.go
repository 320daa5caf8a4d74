package main

import (
	"fmt"
	"io"
	"net/http"
	"os"
	"strconv"
	"strings"
	"sync"
	"syscall"
	"testing"
	"time"
)

// bodyOf repeats a part up to the limit of a unary body, between a head and a tail.
func bodyOf(head, part, tail string) string {
	const limit = 1 << 20
	return head + strings.Repeat(part, (limit-len(head)-len(tail))/len(part)) + tail
}

// worstBodies are what costs a JSON service most by the byte: literals halfway between two numbers, with exponents, empty objects, depth, digits, unknown members; and the
// largest survey that is accepted.
func worstBodies() map[string]string {
	var survey strings.Builder
	survey.WriteString(`{"section":{"kind":"surveyed","points":[[0,10]`)
	for i := 1; i < 999; i++ {
		fmt.Fprintf(&survey, ",[%d.000000000000001,%d.123456789012345]", i, i%7)
	}
	survey.WriteString(`,[999,10]]},"roughness":{"manning":0.03},"bed_slope":0.001,"discharge":100}`)
	list := func(part string) string {
		return bodyOf(`{"section":{"kind":"surveyed","points":[`, part, `0]}}`)
	}
	return map[string]string{
		"halfway":         list("9007199254740993,"),
		"exponents":       list("9007199254740993e-60,"),
		"empty objects":   list("{},"),
		"depth":           bodyOf("", "[", ""),
		"digits":          bodyOf(`{"discharge":`, "7", "}"),
		"unknown members": bodyOf("{", `"unknown":1,`, `"a":1}`),
		"escapes":         bodyOf(`{"id":"`, `\u00e9`, `"}`),
		"survey":          survey.String(),
	}
}

// processorTime returns what a process has used, from /proc, in ticks of 10 ms as on all Linux machines.
func processorTime(t *testing.T, process int) time.Duration {
	t.Helper()
	text, err := os.ReadFile(fmt.Sprintf("/proc/%d/stat", process))
	if err != nil {
		t.Fatal(err)
	}
	fields := strings.Fields(string(text[strings.LastIndexByte(string(text), ')')+2:]))
	user, _ := strconv.Atoi(fields[11])
	system, _ := strconv.Atoi(fields[12])
	return time.Duration(user+system) * 10 * time.Millisecond
}

// TestSixtyFourWorstBodies sends 64 of them at once to a service that is told to live in 110 MiB. It must answer or refuse each, and stay within 128 MiB.
func TestSixtyFourWorstBodies(t *testing.T) {
	c, address := beginUnder(t, "true", "GOMEMLIMIT=110MiB")
	bodies := worstBodies()
	ask := func(body string) (int, error) {
		response, err := http.Post("http://"+address+"/v1/depths", "application/json", strings.NewReader(body))
		if err != nil {
			return 0, err
		}
		defer response.Body.Close()
		_, err = io.Copy(io.Discard, response.Body)
		return response.StatusCode, err
	}
	const alone = 10
	for name, body := range bodies {
		before := processorTime(t, c.Process.Pid)
		status := 0
		for range alone {
			var err error
			if status, err = ask(body); err != nil {
				t.Errorf("%s: %v", name, err)
			}
		}
		if want := map[string]int{"survey": 200}[name]; status == 500 || want != 0 && status != want {
			t.Errorf("%s: status %d", name, status)
		}
		t.Logf("%-16s %4d KiB, status %d, processor time %s", name, len(body)>>10, status, (processorTime(t, c.Process.Pid)-before)/alone)
	}
	outcomes := map[int]int{}
	var mutex sync.Mutex
	var work sync.WaitGroup
	for range 8 {
		for name, body := range bodies {
			work.Go(func() {
				status, err := ask(body)
				mutex.Lock()
				defer mutex.Unlock()
				outcomes[status]++
				if err != nil || status >= 500 && status != http.StatusServiceUnavailable {
					t.Errorf("%s: status %d, %v", name, status, err)
				}
			})
		}
	}
	work.Wait()
	answers(t, address)
	status, err := os.ReadFile(fmt.Sprintf("/proc/%d/status", c.Process.Pid))
	if err != nil {
		t.Fatal(err)
	}
	var peak int
	for line := range strings.Lines(string(status)) {
		if rest, found := strings.CutPrefix(line, "VmHWM:"); found {
			fmt.Sscan(rest, &peak)
		}
	}
	t.Logf("64 at once: %v; resident memory at most %d MiB", outcomes, peak>>10)
	if raceDetector {
		t.Log("the race detector has memory of its own; no limit is held")
	} else if peak == 0 || peak > 128<<10 {
		t.Errorf("%d MiB of resident memory, at most 128 allowed", peak>>10)
	}
	c.Process.Signal(syscall.SIGTERM)
	if err := c.Wait(); err != nil {
		t.Errorf("exit: %v", err)
	}
}
