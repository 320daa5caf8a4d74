package serve

import (
	"errors"
	"fmt"
	"net/netip"
	"strconv"
	"sync"
	"time"

	"github.com/gin-gonic/gin"

	"leat/api/admit"
	"leat/api/operation"
	"leat/api/wire"
)

// stuckAfter is how long a slot may be held without a sign of life before the server calls itself unready. Solves have checkpoints far more often; what has
// none, such as the reading of the longest body, is over sooner.
const stuckAfter = 10 * time.Second

// admission is what decides who may have work done, and when.
type admission struct {
	pool    *admit.Pool
	stuck   time.Duration // stuckAfter
	rates   *admit.Rates
	streams *admit.Places
	holds   [2]sync.Pool // of *admit.Hold, for the classes of unary requests
}

func newAdmission(config *Config) *admission {
	return &admission{
		pool:    admit.New(admit.Settings{Slots: config.solves(), Queue: config.Queue, Wait: config.QueueWait}),
		stuck:   stuckAfter,
		rates:   admit.NewRates(config.Rate, config.Burst),
		streams: admit.NewPlaces(config.Streams),
	}
}

// classOf is the class of an operation's unary requests.
func classOf(op *operation.Operation) admit.Class {
	if op.Long {
		return admit.Long
	}
	return admit.Short
}

// hold returns a claim to a slot; put gives it back for others to use.
func (a *admission) hold(class admit.Class) *admit.Hold {
	if h, found := a.holds[class].Get().(*admit.Hold); found {
		return h
	}
	return a.pool.Hold(class)
}

func (a *admission) put(class admit.Class, h *admit.Hold) { a.holds[class].Put(h) }

// rateKey is what the rates know a caller by: its name, where it has a key or a certificate, or its address. One machine may have many addresses of IPv6, all
// with the same 64 bits in front.
func rateKey(caller string) string {
	address, err := netip.ParseAddr(caller)
	if err != nil || !address.Is6() || address.Is4In6() {
		return caller
	}
	network, err := address.WithZone("").Prefix(64)
	if err != nil {
		return caller
	}
	return network.String()
}

// tooOften refuses a caller that comes too often, and reports whether it did.
func (s *Server) tooOften(c *gin.Context) bool {
	wait, allowed := s.admission.rates.Allow(rateKey(exchangeOf(c).caller), time.Now())
	if allowed {
		return false
	}
	s.metrics.turnedAway.WithLabelValues(awayRate).Inc()
	retryAfter(c, admit.Pause(wait))
	s.refuse(c, wire.TooManyRequests(fmt.Sprintf(
		"This caller sends more than requests_per_second, %v; wait for the seconds in Retry-After, and send many requests at once by /v1/bulk, which counts as one.", s.config.Rate)))
	return true
}

// retryAfter tells when to come again.
func retryAfter(c *gin.Context, seconds int) {
	c.Writer.Header()["Retry-After"] = []string{strconv.Itoa(seconds)}
}

// noSlot is the problem of a request that got no slot, or whose client left while it waited.
func (s *Server) noSlot(c *gin.Context, err error) *wire.Problem {
	var refusal *admit.Refusal
	if !errors.As(err, &refusal) {
		return goneClient()
	}
	s.metrics.turnedAway.WithLabelValues(string(refusal.Reason)).Inc()
	retryAfter(c, admit.Pause(refusal.Expected))
	why := fmt.Sprintf("%d requests wait", refusal.Waiting)
	switch refusal.Reason {
	case admit.LineFull:
		why += ", as many as may at once"
	case admit.LongWait:
		why += ", and one more would have to wait for too much of queue_wait_seconds"
	case admit.WaitedLong:
		why = fmt.Sprintf("the request waited for queue_wait_seconds, %v", s.config.QueueWait.Seconds())
	}
	return wire.Saturated("The processors are busy: " + why + ". Send the request again after the seconds in Retry-After.")
}
