package main

import (
	"bytes"
	"crypto/ecdsa"
	"crypto/elliptic"
	"crypto/rand"
	"crypto/tls"
	"crypto/x509"
	"encoding/pem"
	"math/big"
	"net"
	"net/http"
	"os"
	"path/filepath"
	"strings"
	"syscall"
	"testing"
	"time"
)

// makeKey runs leat key and returns the key and the line for the file.
func makeKey(t *testing.T, caller string) (key, line string) {
	t.Helper()
	c := command(t, nil, "key", caller)
	var out, told bytes.Buffer
	c.Stdout, c.Stderr = &out, &told
	if err := c.Run(); err != nil {
		t.Fatalf("%v: %s", err, told.String())
	}
	_, key, found := strings.Cut(strings.TrimSpace(told.String()), ": ")
	if !found || strings.Contains(out.String(), key) || strings.Count(out.String(), "\n") != 1 {
		t.Fatalf("standard output %q, standard error %q", out.String(), told.String())
	}
	return key, out.String()
}

func statusWith(t *testing.T, address, key string) int {
	t.Helper()
	request, err := http.NewRequest("GET", "http://"+address+"/version", nil)
	if err != nil {
		t.Fatal(err)
	}
	request.Header.Set("Authorization", "Bearer "+key)
	response, err := http.DefaultClient.Do(request)
	if err != nil {
		t.Fatal(err)
	}
	response.Body.Close()
	return response.StatusCode
}

// A key that leat key made opens a service, a signal takes changes over, and the signal ends nothing.
func TestKeysFromTheirCommandToTheService(t *testing.T) {
	file := filepath.Join(t.TempDir(), "keys")
	first, line := makeKey(t, "survey")
	if err := os.WriteFile(file, []byte(line), 0o600); err != nil {
		t.Fatal(err)
	}
	c, address, _ := begin(t, "LEAT_KEYS_FILE="+file)
	second, line := makeKey(t, "survey")
	if statusWith(t, address, first) != 200 || statusWith(t, address, second) != 401 {
		t.Error("the first key does not open, or any does")
	}
	if err := os.WriteFile(file, []byte(line), 0o600); err != nil {
		t.Fatal(err)
	}
	c.Process.Signal(syscall.SIGHUP)
	for deadline := time.Now().Add(10 * time.Second); statusWith(t, address, second) != 200; time.Sleep(10 * time.Millisecond) {
		if time.Now().After(deadline) {
			t.Fatal("the second key never opens")
		}
	}
	if statusWith(t, address, first) != 401 {
		t.Error("the first key still opens")
	}
	c.Process.Signal(syscall.SIGTERM)
	if err := c.Wait(); err != nil {
		t.Error(err)
	}
}

func TestHealthOverTLSAndAtTheAdminListener(t *testing.T) {
	folder := t.TempDir()
	key, err := ecdsa.GenerateKey(elliptic.P256(), rand.Reader)
	if err != nil {
		t.Fatal(err)
	}
	template := &x509.Certificate{SerialNumber: big.NewInt(1), DNSNames: []string{"leat.example"}, NotAfter: time.Now().Add(time.Hour), IsCA: true, BasicConstraintsValid: true}
	der, err := x509.CreateCertificate(rand.Reader, template, template, &key.PublicKey, key)
	if err != nil {
		t.Fatal(err)
	}
	secret, err := x509.MarshalPKCS8PrivateKey(key)
	if err != nil {
		t.Fatal(err)
	}
	write := func(name, kind string, der []byte) string {
		path := filepath.Join(folder, name)
		if err := os.WriteFile(path, pem.EncodeToMemory(&pem.Block{Type: kind, Bytes: der}), 0o600); err != nil {
			t.Fatal(err)
		}
		return path
	}
	secured := []string{"LEAT_TLS_CERTIFICATE=" + write("certificate", "CERTIFICATE", der), "LEAT_TLS_KEY=" + write("key", "PRIVATE KEY", secret)}
	c, address, _ := begin(t, secured...)
	if out, err := command(t, append(secured, "LEAT_LISTEN="+address), "health").CombinedOutput(); err != nil {
		t.Errorf("over TLS: %v %s", err, out)
	}
	connection, err := tls.Dial("tcp", address, &tls.Config{InsecureSkipVerify: true, NextProtos: []string{"h2"}})
	if err != nil || connection.ConnectionState().NegotiatedProtocol != "h2" {
		t.Errorf("HTTP/2 is not offered: %v", err)
	} else {
		connection.Close()
	}
	c.Process.Signal(syscall.SIGTERM)
	c.Wait()

	// With certificates of callers only the admin listener can be asked.
	admin := freeAddress(t)
	c, _, _ = begin(t, append(secured, "LEAT_CLIENT_AUTHORITIES="+filepath.Join(folder, "certificate"), "LEAT_ADMIN_LISTEN="+admin)...)
	if out, err := command(t, append(secured, "LEAT_LISTEN=127.0.0.1:1", "LEAT_ADMIN_LISTEN="+admin), "health").CombinedOutput(); err != nil {
		t.Errorf("at the admin listener: %v %s", err, out)
	}
	c.Process.Signal(syscall.SIGTERM)
	c.Wait()
}

// freeAddress is one that nothing listens on at this moment.
func freeAddress(t *testing.T) string {
	t.Helper()
	listener, err := net.Listen("tcp", "127.0.0.1:0")
	if err != nil {
		t.Fatal(err)
	}
	defer listener.Close()
	return listener.Addr().String()
}

func TestOpenDoorsAreRefusedByName(t *testing.T) {
	c := command(t, nil, "serve", "--listen", ":0")
	if out, _ := c.CombinedOutput(); c.ProcessState.ExitCode() != 2 || !strings.Contains(string(out), "--allow-open") {
		t.Errorf("%d %s", c.ProcessState.ExitCode(), out)
	}
	c = command(t, nil, "serve", "--listen", "127.0.0.1:0", "--keys-file", "/nowhere/at/all")
	if out, _ := c.CombinedOutput(); c.ProcessState.ExitCode() != 1 || !strings.Contains(string(out), "/nowhere/at/all") {
		t.Errorf("%d %s", c.ProcessState.ExitCode(), out)
	}
}
