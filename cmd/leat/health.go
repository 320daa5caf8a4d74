package main

import (
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
	listen, err := serve.LoadListen(arguments, environment)
	if errors.Is(err, flag.ErrHelp) {
		fmt.Fprint(stdout, "leat health asks GET /readyz of the service at --listen HOST:PORT (or LEAT_LISTEN, or "+serve.Default().Listen+") and exits with 0 if it is ready, else with 1.\n")
		return exitOK
	}
	if err != nil {
		fmt.Fprintf(stderr, "leat health: %v\n", err)
		return exitMisused
	}
	if err := askReadiness(listen); err != nil {
		fmt.Fprintf(stderr, "leat health: %v\n", err)
		return exitFailed
	}
	return exitOK
}

func askReadiness(listen string) error {
	host, port, err := net.SplitHostPort(listen)
	if err != nil {
		return err
	}
	// A server that listens on every address is asked on this machine's own.
	if ip := net.ParseIP(host); host == "" || ip != nil && ip.IsUnspecified() {
		host = "localhost"
	}
	client := http.Client{Timeout: healthTimeout, Transport: &http.Transport{Proxy: nil, DisableKeepAlives: true}}
	response, err := client.Get("http://" + net.JoinHostPort(host, port) + "/readyz")
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
