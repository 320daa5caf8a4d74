package serve

import (
	"bufio"
	"io"
	"net"
	"net/http"
	"strings"
	"testing"
	"time"

	"github.com/prometheus/client_golang/prometheus/testutil"
)

func TestConnectionsAreBounded(t *testing.T) {
	r := start(t, func(c *Config, _ *Surroundings) { c.Connections, c.AdminListen = 3, "127.0.0.1:0" })
	var held []*net.TCPConn
	for range 3 {
		held = append(held, r.dial())
	}
	waitFor(t, "three connections", func() bool { return r.inside.Load() == 3 })
	for range 5 {
		got := r.exchangeRaw("POST /v1/depths HTTP/1.1\r\nHost: leat\r\nContent-Type: application/json\r\nContent-Length: 2\r\n\r\n{}")
		response, err := http.ReadResponse(bufio.NewReader(strings.NewReader(got)), nil)
		if err != nil {
			t.Fatalf("%q: %v", got, err)
		}
		body, err := io.ReadAll(response.Body)
		if err != nil || !response.Close || response.Header.Get("Retry-After") == "" {
			t.Errorf("%v %v", err, response.Header)
		}
		reply{response.StatusCode, response.Header, body}.problem(t, 503)
	}
	// Probes have another door.
	probe, err := http.Get("http://" + r.AdminAddress().String() + "/readyz")
	if err != nil || probe.StatusCode != 200 {
		t.Errorf("probe: %v, %v", probe, err)
	} else {
		probe.Body.Close()
	}
	http.DefaultClient.CloseIdleConnections()
	held[0].Close()
	waitFor(t, "a place", func() bool { return r.inside.Load() == 2 })
	if got := r.send("POST", "/v1/depths", "{}", "Content-Type", jsonHeader); got.status != 200 {
		t.Errorf("with a place: %d", got.status)
	}
	if n := testutil.ToFloat64(r.metrics.refused); n != 5 {
		t.Errorf("counted %v refused connections", n)
	}
}

func TestCrowdBeforeTLSIsSentAway(t *testing.T) {
	a := newAuthority(t, "ours")
	r, _ := startTLS(t, a, nil)
	r.inside.Store(int64(r.config.Connections))
	if _, err := ask(t, a.secureClient(false, "", ""), "GET", "https://"+r.address+"/livez", ""); err == nil {
		t.Error("let in beyond the bound")
	}
	r.inside.Store(0)
	if _, err := ask(t, a.secureClient(false, "", ""), "GET", "https://"+r.address+"/livez", ""); err != nil {
		t.Error(err)
	}
}

// TestSlowSocketsAreCut: hundreds of clients that send their header or body by drops, or read nothing, are cut at the limits, while others are served.
func TestSlowSocketsAreCut(t *testing.T) {
	const each, readers = 150, 10
	r := start(t, func(c *Config, _ *Surroundings) { c.HeldBytes = 128 << 20 }, func(s *http.Server) {
		s.ReadHeaderTimeout, s.ReadTimeout, s.WriteTimeout = 2*time.Second, 3*time.Second, 6*time.Second
	})
	// One after the other, so that none is refused for want of a slot. Open and unread until the test ends: only the server can close them.
	for i := range readers {
		c := r.dial()
		c.SetReadBuffer(4 << 10) // so that the kernel does not take what the reader leaves
		io.WriteString(c, "POST /v1/depths HTTP/1.1\r\nHost: leat\r\nContent-Type: application/json\r\nContent-Length: 17\r\n\r\n{\"bytes\":9000000}")
		waitFor(t, "an answer to wait for its reader", func() bool { return r.shelf.held.Load() >= int64(i+1)*9000000 })
	}
	began := time.Now()
	cut := make(chan string, 2*each)
	for _, kind := range []struct {
		name, first, drop string
		count             int
	}{
		{"header", "POST /v1/depths HTTP/1.1\r\n", "X: y\r\n", each},
		{"body", "POST /v1/depths HTTP/1.1\r\nHost: leat\r\nContent-Type: application/json\r\nContent-Length: 100000\r\n\r\n{", " ", each},
	} {
		for range kind.count {
			c := r.dial()
			io.WriteString(c, kind.first)
			go func() {
				for {
					if _, err := io.WriteString(c, kind.drop); err != nil {
						cut <- kind.name
						return
					}
					time.Sleep(100 * time.Millisecond)
				}
			}()
		}
	}
	client := r.client()
	for time.Since(began) < 2*time.Second {
		for _, target := range []string{"/v1/section", "/readyz"} {
			method := http.MethodPost
			if target == "/readyz" {
				method = http.MethodGet
			}
			request, err := http.NewRequest(method, r.url(target), strings.NewReader("{}"))
			if err != nil {
				t.Fatal(err)
			}
			request.Header.Set("Content-Type", jsonHeader)
			response, err := client.Do(request)
			if err != nil {
				t.Fatalf("%s beside slow sockets: %v", target, err)
			}
			io.Copy(io.Discard, response.Body)
			response.Body.Close()
			if response.StatusCode != 200 {
				t.Errorf("%s beside slow sockets: %s", target, response.Status)
			}
		}
	}
	count := map[string]int{}
	for range 2 * each {
		select {
		case name := <-cut:
			count[name]++
		case <-time.After(20 * time.Second):
			t.Fatalf("cut after 20 s more: %v", count)
		}
	}
	if count["header"] != each || count["body"] != each {
		t.Errorf("%v", count)
	}
	waitFor(t, "the connections to be closed", func() bool { return r.inside.Load() <= 2 })
	waitFor(t, "the bodies to be let go", func() bool { return r.bodies.held.Load() == 0 })
}

// Readers that take nothing hold so much memory and no more: beyond it answers are refused, small ones are not.
func TestLargeAnswersThatWaitAreBounded(t *testing.T) {
	r := start(t, func(c *Config, _ *Surroundings) { c.HeldBytes = 20 << 20 }, func(s *http.Server) { s.WriteTimeout = 3 * time.Second })
	const request = "POST /v1/depths HTTP/1.1\r\nHost: leat\r\nContent-Type: application/json\r\nContent-Length: 18\r\n\r\n{\"bytes\":19000000}"
	c := r.dial()
	c.SetReadBuffer(4 << 10)
	io.WriteString(c, request)
	waitFor(t, "an answer to wait", func() bool { return r.shelf.held.Load() > 0 })
	if got := r.send("POST", "/v1/depths", `{"bytes":9000000}`, "Content-Type", jsonHeader); got.status != 503 || got.header.Get("Retry-After") == "" {
		t.Errorf("with no room: %d", got.status)
	}
	if got := r.send("POST", "/v1/depths", `{"bytes":100000}`, "Content-Type", jsonHeader); got.status != 200 {
		t.Errorf("with room for a small one: %d", got.status)
	}
	waitFor(t, "the reader to be cut", func() bool { return r.shelf.held.Load() == 0 })
	// One alone may be larger than all the room.
	if got := r.send("POST", "/v1/depths", `{"bytes":30000000}`, "Content-Type", jsonHeader); got.status != 200 || len(got.body) < 30000000 {
		t.Errorf("alone: %d", got.status)
	}
}

// Over HTTP/2 the limits are each stream's: a body that does not come is 408, an answer that is not read is cut, and other streams of the connection live on.
func TestSlowStreamsAreCut(t *testing.T) {
	r := start(t, nil, func(s *http.Server) { s.ReadTimeout, s.WriteTimeout = 500*time.Millisecond, 1500*time.Millisecond })
	var protocols http.Protocols
	protocols.SetUnencryptedHTTP2(true)
	transport := &http.Transport{Protocols: &protocols, DisableCompression: true, HTTP2: &http.HTTP2Config{MaxReceiveBufferPerStream: 64 << 10, MaxReceiveBufferPerConnection: 64 << 20}}
	defer transport.CloseIdleConnections()
	client := &http.Client{Transport: transport, Timeout: 30 * time.Second}
	post := func(body io.Reader) *http.Response {
		t.Helper()
		request, err := http.NewRequest("POST", r.url("/v1/depths"), body)
		if err != nil {
			t.Fatal(err)
		}
		request.Header.Set("Content-Type", jsonHeader)
		response, err := client.Do(request)
		if err != nil {
			t.Fatal(err)
		}
		return response
	}
	unread := post(strings.NewReader(`{"bytes":30000000}`))
	defer unread.Body.Close()
	body, never := io.Pipe()
	defer never.Close()
	slow := post(body)
	slow.Body.Close()
	if slow.StatusCode != http.StatusRequestTimeout || slow.ProtoMajor != 2 {
		t.Errorf("a body that does not come: %s %s", slow.Proto, slow.Status)
	}
	waitFor(t, "the unread answer to be let go", func() bool { return r.shelf.held.Load() == 0 })
	if n, err := io.Copy(io.Discard, unread.Body); err == nil || n >= 30000000 {
		t.Errorf("an answer that was cut reads as whole: %d bytes, %v", n, err)
	}
	other := post(strings.NewReader(`{}`))
	other.Body.Close()
	if other.StatusCode != 200 || r.inside.Load() != 1 {
		t.Errorf("another stream: %s, %d connections", other.Status, r.inside.Load())
	}
}
