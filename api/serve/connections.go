package serve

import (
	"fmt"
	"io"
	"net"
	"sync"
	"sync/atomic"
	"time"

	"crypto/rand"
	"github.com/prometheus/client_golang/prometheus"

	"leat/api/admit"
	"leat/api/wire"
)

// A doorkeeper is a listener that lets in so many connections at once and answers those beyond them with 503 by itself, so that
// a crowd costs neither goroutines nor memory and yet learns why.
type doorkeeper struct {
	*net.TCPListener
	most    int64
	inside  *atomic.Int64
	refused prometheus.Counter
	quiet   bool // what is spoken is not HTTP in the clear, so that a connection is refused by closing it
	leaving chan struct{}
}

// mostLeaving bounds the refused connections that are waited for until they have read why.
const mostLeaving = 64

func (d *doorkeeper) Accept() (net.Conn, error) {
	for {
		c, err := d.AcceptTCP()
		if err != nil {
			return nil, err
		}
		if d.inside.Add(1) <= d.most {
			return &guest{TCPConn: c, inside: d.inside}, nil
		}
		d.inside.Add(-1)
		d.refused.Inc()
		select {
		case d.leaving <- struct{}{}:
			go func() {
				defer func() { <-d.leaving }()
				if !d.quiet {
					sayFull(c)
				}
				c.Close()
			}()
		default:
			c.Close()
		}
	}
}

// sayFull answers a request once it has begun, since clients take an answer that comes before their request for none. What is sent is dropped;
// to close with it unread would break the connection before the answer is there.
func sayFull(c *net.TCPConn) {
	id := rand.Text()
	problem := wire.Saturated("As many connections as the service takes are open at this moment; send the request again after the seconds in Retry-After.")
	problem.Instance = "urn:request:" + id
	body := problem.AppendJSON(nil)
	c.SetDeadline(time.Now().Add(closing))
	if n, _ := c.Read(make([]byte, 1<<10)); n == 0 {
		return
	}
	fmt.Fprintf(c, "HTTP/1.1 503 Service Unavailable\r\nContent-Type: application/problem+json\r\nContent-Length: %d\r\nCache-Control: no-store\r\nRetry-After: %d\r\nRequest-Id: %s\r\nConnection: close\r\n\r\n%s",
		len(body), admit.Pause(0), id, body)
	c.CloseWrite()
	io.CopyN(io.Discard, c, keptBuffer)
}

// A guest is a connection that was let in. It is a TCP connection in all else: net/http closes its writing half first.
type guest struct {
	*net.TCPConn
	inside *atomic.Int64
	once   sync.Once
}

func (g *guest) Close() error {
	g.once.Do(func() { g.inside.Add(-1) })
	return g.TCPConn.Close()
}

// listen binds an address; the error names the setting.
func listen(setting, address string) (*net.TCPListener, error) {
	listener, err := net.Listen("tcp", address)
	if err != nil {
		return nil, fmt.Errorf("--%s %s cannot be bound: %w", setting, address, err)
	}
	return listener.(*net.TCPListener), nil
}
