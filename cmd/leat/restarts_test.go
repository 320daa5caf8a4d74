package main

import (
	"bufio"
	"context"
	"encoding/json"
	"flag"
	"fmt"
	"io"
	"log"
	"net"
	"net/http"
	"net/http/httputil"
	"net/url"
	"os/exec"
	"strings"
	"sync"
	"sync/atomic"
	"syscall"
	"testing"
	"time"
)

var (
	restarts    = flag.Int("restarts", 2, "rolling restarts of TestRollingRestarts")
	restartRate = flag.Int("restart-rate", 100, "requests a second of TestRollingRestarts")
)

// A replica is one process behind the proxy of the test.
type replica struct {
	command *exec.Cmd
	address string
	ready   atomic.Bool
}

func newReplica(t *testing.T) *replica {
	c, address, lines := begin(t, "LEAT_DRAIN_DELAY=500ms", "LEAT_DRAIN_LIMIT=20s")
	go func() {
		for lines.Scan() { // a full pipe would stop it
		}
	}()
	return &replica{command: c, address: address}
}

// watch asks a replica whether it is ready, as a proxy or an orchestrator does, until ctx ends.
func (r *replica) watch(ctx context.Context) {
	client := &http.Client{Timeout: 5 * time.Second}
	for ctx.Err() == nil {
		response, err := client.Get("http://" + r.address + "/readyz")
		if err == nil {
			response.Body.Close()
		}
		r.ready.Store(err == nil && response.StatusCode == http.StatusOK)
		time.Sleep(50 * time.Millisecond)
	}
	client.CloseIdleConnections()
}

// fleet is two replicas behind a proxy that sends requests to those that are ready, in turn, over connections that it keeps.
type fleet struct {
	mutex    sync.Mutex
	replicas []*replica
	next     int
}

func (f *fleet) pick() *replica {
	f.mutex.Lock()
	defer f.mutex.Unlock()
	for range f.replicas {
		f.next++
		if r := f.replicas[f.next%len(f.replicas)]; r.ready.Load() {
			return r
		}
	}
	return f.replicas[0]
}

func (f *fleet) swap(i int, r *replica) (old *replica) {
	f.mutex.Lock()
	defer f.mutex.Unlock()
	old, f.replicas[i] = f.replicas[i], r
	return old
}

// TestRollingRestarts replaces the replicas of a fleet one after the other, as an orchestrator does, while single requests come at a fixed rate and a stream of bulk
// requests goes on. No request may fail, and the stream, which goes on where an end line says, must answer each line once.
func TestRollingRestarts(t *testing.T) {
	f := &fleet{}
	ctx, cancel := context.WithCancel(t.Context())
	defer cancel()
	grow := func() *replica {
		r := newReplica(t)
		go r.watch(ctx)
		for deadline := time.Now().Add(20 * time.Second); !r.ready.Load(); time.Sleep(5 * time.Millisecond) {
			if time.Now().After(deadline) {
				t.Fatal("a replica does not become ready")
			}
		}
		return r
	}
	f.replicas = []*replica{grow(), grow()}
	defer func() {
		for _, r := range f.replicas {
			r.command.Process.Signal(syscall.SIGTERM)
			r.command.Wait()
		}
	}()
	transport := &http.Transport{MaxIdleConnsPerHost: 64}
	defer transport.CloseIdleConnections()
	proxy := &httputil.ReverseProxy{
		Rewrite:       func(p *httputil.ProxyRequest) { p.SetURL(&url.URL{Scheme: "http", Host: f.pick().address}) },
		Transport:     transport,
		FlushInterval: -1,
		ErrorLog:      log.New(io.Discard, "", 0), // a stream that ends early leaves a body that nobody reads
	}
	listener, err := net.Listen("tcp", "127.0.0.1:0")
	if err != nil {
		t.Fatal(err)
	}
	front := &http.Server{Handler: http.HandlerFunc(func(w http.ResponseWriter, r *http.Request) {
		http.NewResponseController(w).EnableFullDuplex()
		proxy.ServeHTTP(w, r)
	})}
	go front.Serve(listener)
	defer front.Close()
	base := "http://" + listener.Addr().String()

	var sent, failed atomic.Int64
	var first sync.Once
	fault := func(format string, more ...any) {
		failed.Add(1)
		first.Do(func() { t.Errorf("the first failure: "+format, more...) })
	}
	client := &http.Client{Transport: &http.Transport{MaxIdleConnsPerHost: 64}, Timeout: 30 * time.Second}
	defer client.CloseIdleConnections()
	const request = `{"section":{"kind":"triangular","side_slope":1},"roughness":{"manning":0.0125},"bed_slope":0.0004,"discharge":0.8}`
	var work sync.WaitGroup
	done := make(chan struct{})
	work.Go(func() { // open loop: a slow answer delays no other request
		ticker := time.NewTicker(time.Second / time.Duration(*restartRate))
		defer ticker.Stop()
		for {
			select {
			case <-done:
				return
			case <-ticker.C:
			}
			work.Go(func() {
				sent.Add(1)
				response, err := client.Post(base+"/v1/depths?detail=brief", "application/json", strings.NewReader(request))
				if err != nil {
					fault("%v", err)
					return
				}
				body, err := io.ReadAll(response.Body)
				response.Body.Close()
				// By hand, as in main_test.go: the normal depth is 1 m.
				if err != nil || response.StatusCode != http.StatusOK || !strings.Contains(string(body), `"normal_depth":1`) && !strings.Contains(string(body), `"normal_depth":0.99999999`) {
					fault("%s %s %v", response.Status, body, err)
				}
			})
		}
	})
	var lines, streams int64
	work.Go(func() {
		for {
			select {
			case <-done:
				return
			default:
			}
			n, err := streamOnce(base, request, lines, done)
			lines += n
			streams++
			if err != nil {
				fault("bulk: %v", err)
				return
			}
		}
	})

	for i := range *restarts {
		old := f.swap(i%2, grow())
		old.command.Process.Signal(syscall.SIGTERM)
		if err := old.command.Wait(); err != nil {
			fault("exit of a replica: %v", err)
		}
	}
	close(done)
	work.Wait()
	t.Logf("%d restarts, %d single requests, %d bulk lines in %d streams, %d failed", *restarts, sent.Load(), lines, streams, failed.Load())
	if sent.Load() < 50 || lines < 50 || streams < 2 {
		t.Error("too little was asked to tell anything")
	}
	if failed.Load() > 0 {
		t.Errorf("%d failed", failed.Load())
	}
}

// streamOnce sends lines with ids from a number on until done is closed or the service ends the stream, and returns how many were answered, in order and each once.
func streamOnce(base, request string, from int64, done <-chan struct{}) (answered int64, err error) {
	reader, writer := io.Pipe()
	defer reader.Close()
	go func() {
		for id := from; ; id++ {
			select {
			case <-done:
				writer.Close()
				return
			default:
			}
			if _, err := fmt.Fprintf(writer, "{\"id\":\"%d\",%s\n", id, request[1:]); err != nil {
				return
			}
			time.Sleep(time.Millisecond)
		}
	}()
	response, err := http.Post(base+"/v1/bulk/depths?detail=brief", "application/x-ndjson", reader)
	if err != nil {
		return 0, err
	}
	defer response.Body.Close()
	if response.StatusCode != http.StatusOK {
		text, _ := io.ReadAll(response.Body)
		return 0, fmt.Errorf("%s %s", response.Status, text)
	}
	scanner := bufio.NewScanner(response.Body)
	for scanner.Scan() {
		var line struct {
			ID     string `json:"id"`
			Result *struct {
				NormalDepth *float64 `json:"normal_depth"`
			} `json:"result"`
			End      *bool `json:"end"`
			Lines    int64 `json:"lines"`
			ResumeAt int64 `json:"resume_at"`
		}
		if err := json.Unmarshal(scanner.Bytes(), &line); err != nil {
			return answered, err
		}
		if line.End != nil {
			if line.Lines != answered || !*line.End && line.ResumeAt != answered+1 {
				return answered, fmt.Errorf("%d lines came, and the end line is %s", answered, scanner.Bytes())
			}
			return answered, nil
		}
		if line.ID != fmt.Sprint(from+answered) || line.Result == nil || line.Result.NormalDepth == nil {
			return answered, fmt.Errorf("line %d is %s", from+answered, scanner.Bytes())
		}
		answered++
	}
	return answered, fmt.Errorf("the stream broke off: %v", scanner.Err())
}
