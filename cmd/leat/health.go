package main

import (
	"crypto/tls"
	"errors"
	"flag"
	"fmt"
	"io"
	"net"
	"net/http"
	"time"

	"leat/api/serve"
)

const healthTimeout = 2 * time.Second

// runHealth is for container probes: the image has no other program to ask with.
func runHealth(arguments, environment []string, stdout, stderr io.Writer) int {
	target, err := serve.LoadProbe(arguments, environment)
	if errors.Is(err, flag.ErrHelp) {
		fmt.Fprint(stdout, "leat health asks GET /readyz of the service on this machine and exits with 0 if it is ready, else with 1. It asks at --admin-listen HOST:PORT (or LEAT_ADMIN_LISTEN), "+
			"or if there is none at --listen HOST:PORT (or LEAT_LISTEN, or "+serve.Default().Listen+"), over TLS if --tls-certificate (or LEAT_TLS_CERTIFICATE) is set. "+
			"A service with --client-authorities can be asked at its admin listener only.\n")
		return exitOK
	}
	if err != nil {
		fmt.Fprintf(stderr, "leat health: %v\n", err)
		return exitMisused
	}
	if err := askReadiness(target); err != nil {
		fmt.Fprintf(stderr, "leat health: %v\n", err)
		return exitFailed
	}
	return exitOK
}

func askReadiness(target serve.ProbeTarget) error {
	host, port, err := net.SplitHostPort(target.Address)
	if err != nil {
		return err
	}
	// A server that listens on every address is asked on this machine's own.
	if ip := net.ParseIP(host); host == "" || ip != nil && ip.IsUnspecified() {
		host = "localhost"
	}
	transport := &http.Transport{Proxy: nil, DisableKeepAlives: true}
	scheme := "http"
	if target.TLS {
		scheme = "https"
		// The certificate is for callers' name of this machine, not for this one. Nothing is sent and one status is learnt, so that to know who answers matters little.
		transport.TLSClientConfig = &tls.Config{InsecureSkipVerify: true}
	}
	client := http.Client{Timeout: healthTimeout, Transport: transport}
	response, err := client.Get(scheme + "://" + net.JoinHostPort(host, port) + "/readyz")
	if err != nil {
		return err
	}
	defer response.Body.Close()
	if response.StatusCode != http.StatusOK {
		body, _ := io.ReadAll(io.LimitReader(response.Body, 4<<10))
		return fmt.Errorf("not ready, status %d: %s", response.StatusCode, body)
	}
	return nil
}
