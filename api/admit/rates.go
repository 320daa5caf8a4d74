package admit

import (
	"container/list"
	"sync"
	"time"

	"golang.org/x/time/rate"
)

// keysKept bounds the callers that Rates remember.
const keysKept = 10_000

// Rates bound how often each caller may come: a burst at once, and a rate in the long run. Callers are known by a key; the one that was away longest is
// forgotten when there are too many, and comes back as a new one. nil Rates let everyone through.
type Rates struct {
	limit rate.Limit
	burst int
	most  int

	mutex sync.Mutex
	keys  map[string]*list.Element
	order *list.List // of *caller, the latest first
}

type caller struct {
	key    string
	bucket *rate.Limiter
}

// NewRates returns rates of so many a second and a burst of at least 1. A rate of 0 is none: nil.
func NewRates(perSecond float64, burst int) *Rates {
	if perSecond == 0 {
		return nil
	}
	return &Rates{limit: rate.Limit(perSecond), burst: burst, most: keysKept, keys: map[string]*list.Element{}, order: list.New()}
}

// Allow reports whether a caller may come now; where it may not, how long it should wait. One that is refused is not charged.
func (r *Rates) Allow(key string, now time.Time) (wait time.Duration, allowed bool) {
	if r == nil {
		return 0, true
	}
	r.mutex.Lock()
	defer r.mutex.Unlock()
	e := r.keys[key]
	if e == nil {
		if len(r.keys) >= r.most {
			oldest := r.order.Back()
			delete(r.keys, r.order.Remove(oldest).(*caller).key)
		}
		e = r.order.PushFront(&caller{key, rate.NewLimiter(r.limit, r.burst)})
		r.keys[key] = e
	}
	r.order.MoveToFront(e)
	reservation := e.Value.(*caller).bucket.ReserveN(now, 1)
	if wait = reservation.DelayFrom(now); wait > 0 {
		reservation.CancelAt(now)
		return wait, false
	}
	return 0, true
}
