package serve

import (
	"context"
	"errors"
	"io"
	"net/http"
	"strings"
	"testing"
	"time"

	"leat/api/operation"
	"leat/api/wire"
)

// longOperation solves until its checkpoint ends it, or for a time that the body says.
func longOperation(ended chan<- error) *operation.Operation {
	return &operation.Operation{Name: "profile", Long: true, Solve: func(body []byte, options operation.Options) (operation.Solved, *wire.Problem) {
		checkpoint := options.Begin(options.Worker)
		for {
			if err := checkpoint(); err != nil {
				ended <- err
				var problem *wire.Problem
				errors.As(err, &problem)
				return operation.Solved{}, problem
			}
			time.Sleep(time.Millisecond)
		}
	}}
}

// A solve that takes longer than time_limit_seconds is ended soon after it, in unary and in bulk, with 504.
func TestTimeLimitEndsASolve(t *testing.T) {
	ended := make(chan error, 8)
	config := Default()
	config.Listen, config.SpoolDir, config.TimeLimit = "127.0.0.1:0", t.TempDir(), 100*time.Millisecond
	server, err := New(config, []*operation.Operation{longOperation(ended)}, testSurroundings(io.Discard))
	if err != nil {
		t.Fatal(err)
	}
	address, err := server.Start()
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { server.Stop() })
	client := &http.Client{Transport: &http.Transport{}}
	t.Cleanup(client.CloseIdleConnections)
	post := func(ctx context.Context, path, media, body string) (int, string, error) {
		request, err := http.NewRequestWithContext(ctx, "POST", "http://"+address.String()+path, strings.NewReader(body))
		if err != nil {
			t.Fatal(err)
		}
		request.Header.Set("Content-Type", media)
		response, err := client.Do(request)
		if err != nil {
			return 0, "", err
		}
		defer response.Body.Close()
		answer, err := io.ReadAll(response.Body)
		return response.StatusCode, string(answer), err
	}
	began := time.Now()
	status, answer, err := post(t.Context(), "/v1/profile", mediaJSON, "{}")
	if took := time.Since(began); err != nil || status != 504 || !strings.Contains(answer, "time_limit_seconds") || took < 100*time.Millisecond || took > time.Second {
		t.Errorf("after %v: %d %s %v", took, status, answer, err)
	}
	began = time.Now()
	status, answer, err = post(t.Context(), "/v1/bulk/profile", mediaNDJSON, "{}\n{}\n")
	if took := time.Since(began); err != nil || status != 200 || strings.Count(answer, `"status":504`) != 2 || !strings.Contains(answer, `"end":true`) || took > 2*time.Second {
		t.Errorf("bulk after %v: %d %s %v", took, status, answer, err)
	}
	for len(ended) > 0 {
		<-ended
	}

	// A client that goes ends its solve.
	ctx, cancel := context.WithTimeout(t.Context(), 20*time.Millisecond)
	defer cancel()
	if _, _, err := post(ctx, "/v1/profile", mediaJSON, "{}"); err == nil {
		t.Error("an answer after the client went")
	}
	select {
	case err := <-ended:
		var problem *wire.Problem
		if !errors.As(err, &problem) || problem.Status != 408 {
			t.Errorf("the solve ended with %v", err)
		}
	case <-time.After(5 * time.Second):
		t.Error("the solve of a client that has gone goes on")
	}
}
