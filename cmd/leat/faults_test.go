package main

import (
	"bufio"
	"encoding/json"
	"flag"
	"fmt"
	"io"
	"net"
	"net/http"
	"os"
	"os/exec"
	"strings"
	"syscall"
	"testing"
	"time"
)

var stopped = flag.Duration("stopped", time.Second, "how long TestAStoppedProcessGoesOn stops the service")

// faultRequest has a normal depth of 1 m, by hand as in main_test.go.
const faultRequest = `{"section":{"kind":"triangular","side_slope":1},"roughness":{"manning":0.0125},"bed_slope":0.0004,"discharge":0.8}`

// within is the time in which the service must be well again after a fault.
const within = 5 * time.Second

// answers fails the test unless the service gives a right answer in time.
func answers(t *testing.T, address string) {
	t.Helper()
	client := &http.Client{Timeout: within, Transport: &http.Transport{DisableKeepAlives: true}}
	var last string
	for deadline := time.Now().Add(within); time.Now().Before(deadline); time.Sleep(50 * time.Millisecond) {
		response, err := client.Post("http://"+address+"/v1/depths?detail=brief", "application/json", strings.NewReader(faultRequest))
		if err != nil {
			last = err.Error()
			continue
		}
		body, err := io.ReadAll(response.Body)
		response.Body.Close()
		if last = fmt.Sprint(response.Status, " ", string(body), err); err == nil && response.StatusCode == http.StatusOK {
			if !strings.Contains(string(body), `"normal_depth":1`) && !strings.Contains(string(body), `"normal_depth":0.99999999`) {
				t.Fatalf("a wrong answer: %s", body)
			}
			return
		}
	}
	t.Fatalf("no answer within %s: %s", within, last)
}

// endWell stops the service, which must exit with 0.
func endWell(t *testing.T, c *exec.Cmd) {
	t.Helper()
	c.Process.Signal(syscall.SIGTERM)
	if err := c.Wait(); err != nil {
		t.Errorf("exit: %v", err)
	}
}

// TestALogThatNobodyReads fills the pipe of the log, which holds 64 KiB, many times over.
func TestALogThatNobodyReads(t *testing.T) {
	c, address, _ := begin(t)
	for range 1000 {
		response, err := http.Post("http://"+address+"/v1/depths?detail=brief", "application/json", strings.NewReader(faultRequest))
		if err != nil {
			t.Fatal(err)
		}
		io.Copy(io.Discard, response.Body)
		response.Body.Close()
	}
	answers(t, address)
	endWell(t, c)
}

// TestAStoppedProcessGoesOn stops the process in the middle of a stream, as a hypervisor that moves a machine does.
func TestAStoppedProcessGoesOn(t *testing.T) {
	c, address, _ := begin(t)
	reader, writer := io.Pipe()
	go func() {
		for range 50 {
			fmt.Fprintln(writer, faultRequest)
			time.Sleep(10 * time.Millisecond)
		}
		writer.Close()
	}()
	time.AfterFunc(100*time.Millisecond, func() {
		c.Process.Signal(syscall.SIGSTOP)
		time.Sleep(*stopped)
		c.Process.Signal(syscall.SIGCONT)
	})
	response, err := http.Post("http://"+address+"/v1/bulk/depths?detail=brief", "application/x-ndjson", reader)
	if err != nil {
		t.Fatal(err)
	}
	text, err := io.ReadAll(response.Body)
	response.Body.Close()
	if err != nil || strings.Count(string(text), `"normal_depth":`) != 50 || !strings.Contains(string(text), `{"end":true,"lines":50,"problems":0,`) {
		t.Errorf("%v %s", err, text)
	}
	answers(t, address)
	endWell(t, c)
}

// beginUnder starts the service by a shell that says something first.
func beginUnder(t *testing.T, first string, environment ...string) (*exec.Cmd, string) {
	t.Helper()
	c := command(t, append(environment, "LEAT_LISTEN=127.0.0.1:0"))
	c.Args = []string{"sh", "-c", first + ` && exec "$0" serve`, os.Args[0]}
	shell, err := exec.LookPath("sh")
	if err != nil {
		t.Fatal(err)
	}
	c.Path = shell
	log, err := c.StderrPipe()
	if err != nil {
		t.Fatal(err)
	}
	if err := c.Start(); err != nil {
		t.Fatal(err)
	}
	lines := bufio.NewScanner(log)
	if !lines.Scan() {
		t.Fatalf("nothing logged: %v", c.Wait())
	}
	var line struct{ Message, Address string }
	if err := json.Unmarshal(lines.Bytes(), &line); err != nil || line.Message != "listening" {
		t.Fatalf("%s: %v", lines.Bytes(), err)
	}
	go func() {
		for lines.Scan() {
		}
	}()
	return c, line.Address
}

// TestNoFileHandles opens more connections than the process has handles for. Those that it has taken are served, and it recovers when they are gone.
func TestNoFileHandles(t *testing.T) {
	c, address := beginUnder(t, "ulimit -n 40")
	answers(t, address)
	var open []net.Conn
	for range 80 {
		connection, err := net.DialTimeout("tcp", address, time.Second)
		if err != nil {
			break
		}
		open = append(open, connection)
	}
	if len(open) < 40 {
		t.Fatalf("%d connections do not use up the handles", len(open))
	}
	time.Sleep(100 * time.Millisecond)
	served := open[0]
	served.SetDeadline(time.Now().Add(within))
	fmt.Fprint(served, "GET /livez HTTP/1.1\r\nHost: leat\r\n\r\n")
	if line, err := bufio.NewReader(served).ReadString('\n'); err != nil || !strings.Contains(line, " 200 ") {
		t.Errorf("a connection that was taken gets %q %v", line, err)
	}
	for _, connection := range open {
		connection.Close()
	}
	answers(t, address)
	endWell(t, c)
}

// TestAFullDiskUnderTheSpool has a client send all before it reads, with a spool on a file system of one megabyte. The stream must end in words, with the line to go on at.
func TestAFullDiskUnderTheSpool(t *testing.T) {
	disk := t.TempDir()
	if out, err := exec.Command("mount", "-t", "tmpfs", "-o", "size=1m", "leat-spool", disk).CombinedOutput(); err != nil {
		said := fmt.Sprintf("a small file system cannot be mounted, which takes a privileged user: %v %s", err, out)
		if os.Getenv("LEAT_ALL_PARTS") == "1" {
			t.Fatal(said)
		}
		t.Skip(said + "; TestALimitOfFileSizes does the same without")
	}
	defer exec.Command("umount", disk).Run()
	fillTheSpool(t, "true", disk)
}

// TestALimitOfFileSizes is TestAFullDiskUnderTheSpool for whoever may mount nothing: the kernel refuses what goes beyond 1 MiB in one file (POSIX counts in blocks of 512 bytes).
func TestALimitOfFileSizes(t *testing.T) {
	fillTheSpool(t, "ulimit -f 2048", t.TempDir())
}

// fillTheSpool starts the service under a shell's command, with a spool in a folder that takes about 1 MiB.
func fillTheSpool(t *testing.T, first, disk string) {
	c, address := beginUnder(t, first, "LEAT_SPOOL_DIR="+disk, "LEAT_MEMORY_BYTES=64KiB", "LEAT_IDLE_LIMIT=3s")
	connection, err := net.Dial("tcp", address)
	if err != nil {
		t.Fatal(err)
	}
	defer connection.Close()
	connection.SetDeadline(time.Now().Add(30 * time.Second))
	const lines = 100_000
	fmt.Fprintf(connection, "POST /v1/bulk/depths HTTP/1.1\r\nHost: leat\r\nContent-Type: application/x-ndjson\r\nContent-Length: %d\r\nConnection: close\r\n\r\n", lines*(len(faultRequest)+1))
	go func() {
		w := bufio.NewWriter(connection)
		for range lines {
			if _, err := fmt.Fprintln(w, faultRequest); err != nil {
				return // the service has had enough, which its answer says
			}
		}
		w.Flush()
	}()
	time.Sleep(2 * time.Second) // by then the disk is full
	answers(t, address)
	response, err := http.ReadResponse(bufio.NewReader(connection), nil)
	if err != nil {
		t.Fatal(err)
	}
	text, err := io.ReadAll(response.Body)
	last := string(text[strings.LastIndex(strings.TrimRight(string(text), "\n"), "\n")+1:])
	if err != nil || !strings.Contains(last, `{"end":`) || strings.Contains(last, `"end":true`) && !strings.Contains(last, fmt.Sprintf(`"lines":%d,`, lines)) {
		t.Errorf("%v, last line %.300s", err, last)
	}
	t.Logf("%d bytes, last line %s", len(text), last)
	answers(t, address)
	endWell(t, c)
}
