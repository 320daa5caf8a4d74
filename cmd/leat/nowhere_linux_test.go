package main

import (
	"bytes"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"net"
	"net/http"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"syscall"
	"testing"
	"time"
	"unsafe"
)

// nowhere has the test binary run the service where no network is: RUN_NOWHERE=1 in a network namespace of its own.
const nowhere = "RUN_NOWHERE"

// TestServiceNeedsNoNetwork: in a network namespace that has a loopback and not one route beyond it, the service starts, is ready, and gives every
// example of the contract the answer that stands there.
func TestServiceNeedsNoNetwork(t *testing.T) {
	if os.Getenv(nowhere) == "1" {
		serveNowhere(t)
		return
	}
	c := exec.CommandContext(t.Context(), os.Args[0], "-test.run", "^TestServiceNeedsNoNetwork$", "-test.v")
	c.Env = append(os.Environ(), nowhere+"=1")
	c.SysProcAttr = &syscall.SysProcAttr{
		Cloneflags:  syscall.CLONE_NEWUSER | syscall.CLONE_NEWNET,
		UidMappings: []syscall.SysProcIDMap{{HostID: os.Getuid(), Size: 1}}, GidMappings: []syscall.SysProcIDMap{{HostID: os.Getgid(), Size: 1}},
	}
	out, err := c.CombinedOutput()
	var exit *exec.ExitError
	if err != nil && !errors.As(err, &exit) {
		if os.Getuid() == 0 { // where user namespaces are switched off, root needs none
			c = exec.CommandContext(t.Context(), os.Args[0], "-test.run", "^TestServiceNeedsNoNetwork$", "-test.v")
			c.Env = append(os.Environ(), nowhere+"=1")
			c.SysProcAttr = &syscall.SysProcAttr{Cloneflags: syscall.CLONE_NEWNET}
			out, err = c.CombinedOutput()
		}
		if err != nil && !errors.As(err, &exit) {
			if os.Getenv("LEAT_ALL_PARTS") == "1" {
				t.Fatalf("no network namespace can be made: %v", err)
			}
			t.Skipf("no network namespace can be made here: %v", err)
		}
	}
	if err != nil || !bytes.Contains(out, []byte("answered without a network")) {
		t.Errorf("%v\n%s", err, out)
	}
}

func serveNowhere(t *testing.T) {
	if err := raiseLoopback(); err != nil {
		t.Fatal(err)
	}
	interfaces, err := net.Interfaces()
	if err != nil || len(interfaces) != 1 {
		t.Fatalf("%v, %v: the loopback alone is wanted", interfaces, err)
	}
	if c, err := net.DialTimeout("udp", "192.0.2.1:9", time.Second); err == nil {
		c.Close()
		t.Fatal("there is a route out")
	}
	c, address, _ := begin(t)
	examples, err := filepath.Glob("../../openapi/examples/*.request.json")
	if err != nil || len(examples) < 5 {
		t.Fatalf("%d examples, %v", len(examples), err)
	}
	answered := 0
	for _, path := range examples {
		operation, _, _ := strings.Cut(filepath.Base(path), ".")
		if operation == "problem" {
			continue
		}
		body, err := os.ReadFile(path)
		if err != nil {
			t.Fatal(err)
		}
		want, err := os.ReadFile(strings.TrimSuffix(path, "request.json") + "answer.json")
		if err != nil {
			continue
		}
		response, err := http.Post("http://"+address+"/v1/"+operation, "application/json", bytes.NewReader(body))
		if err != nil {
			t.Fatal(err)
		}
		got, err := io.ReadAll(response.Body)
		response.Body.Close()
		if err != nil {
			t.Fatal(err)
		}
		if response.StatusCode != 200 || !sameJSON(got, want) {
			t.Errorf("%s: %s %.300s", path, response.Status, got)
		}
		answered++
	}
	if answered < 5 {
		t.Errorf("only %d examples were answered", answered)
	}
	if out, err := command(t, []string{"LEAT_LISTEN=" + address}, "health").CombinedOutput(); err != nil {
		t.Errorf("%v %s", err, out)
	}
	c.Process.Signal(syscall.SIGTERM)
	if err := c.Wait(); err != nil {
		t.Error(err)
	}
	if !t.Failed() {
		fmt.Println(answered, "examples answered without a network")
	}
}

func sameJSON(a, b []byte) bool {
	var x, y any
	if json.Unmarshal(a, &x) != nil || json.Unmarshal(b, &y) != nil {
		return false
	}
	left, _ := json.Marshal(x)
	right, _ := json.Marshal(y)
	return bytes.Equal(left, right)
}

// raiseLoopback does what `ip link set lo up` does, which a machine may not have.
func raiseLoopback() error {
	socket, err := syscall.Socket(syscall.AF_INET, syscall.SOCK_DGRAM, 0)
	if err != nil {
		return err
	}
	defer syscall.Close(socket)
	var request struct { // struct ifreq
		name  [16]byte
		flags uint16
		_     [22]byte
	}
	copy(request.name[:], "lo")
	request.flags = syscall.IFF_UP | syscall.IFF_RUNNING
	if _, _, errno := syscall.Syscall(syscall.SYS_IOCTL, uintptr(socket), syscall.SIOCSIFFLAGS, uintptr(unsafe.Pointer(&request))); errno != 0 {
		return errno
	}
	return nil
}
