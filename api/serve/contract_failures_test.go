package serve_test

import (
	"bufio"
	"bytes"
	"io"
	"net"
	"net/http"
	"strings"
	"testing"
	"time"

	"leat/api/operation"
	"leat/api/serve"
	"leat/api/wire"
	"leat/openapi"
)

// troubled stands in for the operation depths: the body says what goes wrong.
func troubled(waiting, release chan struct{}) []*operation.Operation {
	operations := operation.All()
	for i, op := range operations {
		if op.Name != "depths" {
			continue
		}
		other := *op
		other.Solve = func(body []byte, options operation.Options) (operation.Solved, *wire.Problem) {
			switch {
			case bytes.Contains(body, []byte("panic")):
				panic("as asked")
			case bytes.Contains(body, []byte("internal")):
				return operation.Solved{}, wire.Internal("As asked.")
			case bytes.Contains(body, []byte("non_finite")):
				return operation.Solved{}, wire.NonFiniteResult("As asked.")
			case bytes.Contains(body, []byte("no_solution")):
				return operation.Solved{}, wire.NoSolution("/depth", "asked_for", "As asked.")
			case bytes.Contains(body, []byte("late")):
				time.Sleep(1200 * time.Millisecond)
			case bytes.Contains(body, []byte("wait")):
				waiting <- struct{}{}
				<-release
			}
			return op.Solve([]byte(good), options)
		}
		operations[i] = &other
	}
	return operations
}

const good = `{"section":{"kind":"circular","diameter":0.6},"roughness":{"manning":0.013},"bed_slope":0.004,"discharge":0.2}`

func startTroubled(t *testing.T, read time.Duration, change func(*serve.Config)) (s *service, server *serve.Server, waiting, release chan struct{}) {
	t.Helper()
	waiting, release = make(chan struct{}), make(chan struct{})
	config := serve.Default()
	config.Listen = "127.0.0.1:0"
	config.SpoolDir = t.TempDir()
	change(&config)
	server, err := serve.New(config, troubled(waiting, release), serve.Surroundings{
		Log: serve.NewLog(io.Discard), Ready: func() error { return nil }, Contract: openapi.YAML,
	})
	if err != nil {
		t.Fatal(err)
	}
	server.ReadWithin(read)
	address, err := server.Start()
	if err != nil {
		t.Fatal(err)
	}
	transport := &http.Transport{DisableCompression: true}
	t.Cleanup(transport.CloseIdleConnections)
	return &service{server, t, "http://" + address.String(), &http.Client{
		Transport: &serve.ContractTransport{T: t, Next: transport}, Timeout: time.Minute,
	}}, server, waiting, release
}

// TestContractFailures: what goes wrong on the service's side is told as the contract says, each answer judged on its way.
func TestContractFailures(t *testing.T) {
	s, server, waiting, release := startTroubled(t, time.Minute, func(c *serve.Config) {
		c.TimeLimit = time.Second
		c.BodyBytes = 4 << 10
		c.HeldBytes = 3 << 10 // room for one body
		c.DrainDelay = 300 * time.Millisecond
	})
	const target = "/v1/depths"
	for body, want := range map[string]int{
		good: 200, `{"panic":1}`: 500, `{"internal":1}`: 500, `{"non_finite":1}`: 500, `{"no_solution":1}`: 422, `{"late":1}`: 504,
	} {
		if status, answer := s.post(target, jsonMedia, []byte(body)); status != want {
			t.Errorf("%s: %d %s, want %d", body, status, answer, want)
		}
	}

	// In bulk each costs its line. (A line that takes long is no failure there.)
	lines := strings.Join([]string{good, `{"panic":1}`, `{"internal":1}`, `{"non_finite":1}`, `{"no_solution":1}`, good}, "\n")
	status, answer := s.post("/v1/bulk/depths", ndjsonMedia, []byte(lines))
	if status != 200 || !bytes.Contains(answer, []byte(`{"end":true,"lines":6,"problems":4,`)) {
		t.Errorf("bulk: %d %s", status, answer)
	}

	// While one body is held there is no room for another.
	done := make(chan int)
	go func() {
		status, _ := s.post(target, jsonMedia, []byte(`{"wait":1}`))
		done <- status
	}()
	<-waiting
	if status, answer := s.post(target, jsonMedia, []byte(good)); status != 503 {
		t.Errorf("with no room for a body: %d %s, want 503", status, answer)
	}
	close(release)
	<-done

	// A service that is about to stop says so.
	if status, _, _ := s.send("GET", "/readyz", nil); status != 200 {
		t.Errorf("/readyz: %d", status)
	}
	stopped := make(chan error)
	go func() { stopped <- server.Stop() }()
	for deadline := time.Now().Add(5 * time.Second); ; time.Sleep(time.Millisecond) {
		status, _, _ := s.send("GET", "/readyz", nil)
		if status == 503 {
			break
		}
		if time.Now().After(deadline) {
			t.Fatal("/readyz never says 503")
		}
	}
	if err := <-stopped; err != nil {
		t.Error(err)
	}
}

// TestContractDrain: a stream that a stop ends early has the end line that the contract says.
func TestContractDrain(t *testing.T) {
	s, server, _, _ := startTroubled(t, time.Minute, func(c *serve.Config) {})
	body, lines := io.Pipe()
	request, err := http.NewRequest("POST", s.base+"/v1/bulk/depths?detail=brief", body)
	if err != nil {
		t.Fatal(err)
	}
	request.Header.Set("Content-Type", ndjsonMedia)
	go io.WriteString(lines, good+"\n")
	response, err := s.http.Do(request)
	if err != nil {
		t.Fatal(err)
	}
	defer response.Body.Close()
	reader := bufio.NewReader(response.Body)
	if line, err := reader.ReadString('\n'); err != nil || !strings.Contains(line, `"result"`) {
		t.Fatalf("first line %s, %v", line, err)
	}
	stopped := make(chan error)
	go func() { stopped <- server.Stop() }()
	end, err := io.ReadAll(reader)
	if err != nil {
		t.Fatal(err)
	}
	if !bytes.Contains(end, []byte(`"end":false,"reason":"draining","resume_at":2,`)) {
		t.Errorf("end line %s", end)
	}
	lines.Close()
	if err := <-stopped; err != nil {
		t.Error(err)
	}
}

// TestContractSlowBody: a body that does not come in time is 408.
func TestContractSlowBody(t *testing.T) {
	s, server, _, _ := startTroubled(t, 200*time.Millisecond, func(c *serve.Config) {})
	defer server.Stop()
	connection, err := net.Dial("tcp", strings.TrimPrefix(s.base, "http://"))
	if err != nil {
		t.Fatal(err)
	}
	defer connection.Close()
	connection.SetDeadline(time.Now().Add(time.Minute))
	io.WriteString(connection, "POST /v1/depths HTTP/1.1\r\nHost: leat\r\nContent-Type: application/json\r\nContent-Length: 100\r\n\r\n{")
	response, err := http.ReadResponse(bufio.NewReader(connection), nil)
	if err != nil {
		t.Fatal(err)
	}
	defer response.Body.Close()
	answer, err := io.ReadAll(response.Body)
	if err != nil {
		t.Fatal(err)
	}
	contract, err := serve.LoadContract()
	if err != nil {
		t.Fatal(err)
	}
	if response.StatusCode != 408 {
		t.Errorf("%d %s, want 408", response.StatusCode, answer)
	}
	if err := contract.Answer("POST", "/v1/depths", response.StatusCode, response.Header, answer); err != nil {
		t.Error(err)
	}
}
