package drive

import (
	"bufio"
	"context"
	"fmt"
	"io"
	"net"
	"net/http"
	"sync"
	"time"
)

// answerLimit is how long a request may take from when it was due.
const answerLimit = 60 * time.Second

// A client sends requests that are ready as bytes over kept connections. It does as little as it can, since it shares the processors with what it measures.
type client struct {
	address string
	mutex   sync.Mutex
	idle    []*connection
}

type connection struct {
	net.Conn
	in   *bufio.Reader
	used time.Time
}

// A reply is an answer, read to its end.
type reply struct {
	status     int
	retryAfter string
	body       []byte
}

// keptIdle is how long a connection is kept; the service closes those that are idle for longer than a minute.
const keptIdle = 20 * time.Second

// get returns a kept connection, the one used last, or dials.
func (c *client) get(ctx context.Context) (*connection, error) {
	c.mutex.Lock()
	for len(c.idle) > 0 {
		last := len(c.idle) - 1
		k := c.idle[last]
		c.idle = c.idle[:last]
		if time.Since(k.used) < keptIdle {
			c.mutex.Unlock()
			return k, nil
		}
		k.Close()
	}
	c.mutex.Unlock()
	return c.dial(ctx)
}

func (c *client) dial(ctx context.Context) (*connection, error) {
	var d net.Dialer
	n, err := d.DialContext(ctx, "tcp", c.address)
	if err != nil {
		return nil, err
	}
	return &connection{Conn: n, in: bufio.NewReaderSize(n, 8<<10)}, nil
}

func (c *client) put(k *connection) {
	k.used = time.Now()
	c.mutex.Lock()
	c.idle = append(c.idle, k)
	c.mutex.Unlock()
}

func (c *client) close() {
	c.mutex.Lock()
	defer c.mutex.Unlock()
	for _, k := range c.idle {
		k.Close()
	}
	c.idle = nil
}

// send sends a request and reads its answer. Any error counts as a broken connection: nothing is tried twice.
func (c *client) send(ctx context.Context, request []byte, due time.Time) (reply, error) {
	k, err := c.get(ctx)
	if err != nil {
		return reply{}, err
	}
	r, keep, err := k.exchange(request, due)
	if err != nil || !keep {
		k.Close()
		return r, err
	}
	c.put(k)
	return r, nil
}

// exchange sends a request and reads its answer; keep says that the connection can be used again.
func (k *connection) exchange(request []byte, due time.Time) (r reply, keep bool, err error) {
	k.SetDeadline(due.Add(answerLimit))
	if _, err := k.Write(request); err != nil {
		return r, false, err
	}
	response, err := http.ReadResponse(k.in, nil)
	if err != nil {
		return r, false, err
	}
	r.status, r.retryAfter = response.StatusCode, response.Header.Get("Retry-After")
	r.body, err = io.ReadAll(response.Body)
	response.Body.Close()
	return r, !response.Close, err
}

// post and get are requests as bytes.
func post(address, path string, body []byte) []byte {
	return fmt.Appendf(nil, "POST %s HTTP/1.1\r\nHost: %s\r\nContent-Type: application/json\r\nContent-Length: %d\r\n\r\n%s", path, address, len(body), body)
}

func get(address, path string, more string) []byte {
	return fmt.Appendf(nil, "GET %s HTTP/1.1\r\nHost: %s\r\n%s\r\n", path, address, more)
}
