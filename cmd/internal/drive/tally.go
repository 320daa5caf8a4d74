package drive

import (
	"bytes"
	"fmt"
	"math"
	"net/http"
	"strconv"
	"sync"
	"time"

	"github.com/go-json-experiment/json"
	"github.com/go-json-experiment/json/jsontext"
)

// A target is one kind of request, ready to be sent.
type target struct {
	Request
	bytes  []byte
	first  []byte        // the answer that all others must equal
	normal time.Duration // what it takes when nothing else is there
}

// A tally is what became of the requests of a stage. Its methods may be called from any goroutine.
type tally struct {
	mutex    sync.Mutex
	sent     int64
	accepted histogram
	refused  histogram
	inTime   int64 // accepted, and within the queue's wait and twice their normal time
	within   int64 // accepted, and answered before the stage's end
	wrong    int64 // 200, and not the answer
	odd      int64 // another status
	silent   int64 // refused without a usable Retry-After
	broken   int64
	unsent   int64 // due, but too many were under way
	said     []string
}

// say keeps a few sentences of what went wrong.
func (t *tally) say(format string, values ...any) {
	if len(t.said) < 5 {
		t.said = append(t.said, fmt.Sprintf(format, values...))
	}
}

// note takes in how a request ended that was due at a time. wait is the queue's; until is the end of the stage.
func (t *tally) note(of *target, r reply, err error, due, until time.Time, wait time.Duration) {
	now := time.Now()
	took := now.Sub(due)
	t.mutex.Lock()
	defer t.mutex.Unlock()
	t.sent++
	switch {
	case err != nil:
		t.broken++
		t.say("%s: %v", of.Name, err)
	case r.status == http.StatusOK && !bytes.Equal(r.body, of.first):
		t.wrong++
		t.say("%s: an answer that is not the first one: %.200s", of.Name, r.body)
	case r.status == http.StatusOK:
		t.accepted.add(took)
		if took <= wait+2*of.normal {
			t.inTime++
		}
		if !now.After(until) {
			t.within++
		}
	case r.status == http.StatusServiceUnavailable || r.status == http.StatusTooManyRequests:
		t.refused.add(took)
		if seconds, err := strconv.Atoi(r.retryAfter); err != nil || seconds < 1 {
			t.silent++
			t.say("%s: status %d with Retry-After %q", of.Name, r.status, r.retryAfter)
		}
	default:
		t.odd++
		t.say("%s: status %d: %.200s", of.Name, r.status, r.body)
	}
}

// judge checks the first answer of a target by what the plan expects.
func (t *target) judge() error {
	for pointer, want := range t.Expect {
		value := jsontext.Value(t.first)
		found, err := at(value, jsontext.Pointer(pointer))
		if err != nil {
			return fmt.Errorf("%s: %s: %w", t.Name, pointer, err)
		}
		if !(math.Abs(found-want) <= 1e-9*math.Abs(want)) {
			return fmt.Errorf("%s: %s is %v, must be %v", t.Name, pointer, found, want)
		}
	}
	return nil
}

// at returns the number at a pointer.
func at(value jsontext.Value, pointer jsontext.Pointer) (float64, error) {
	var here any
	if err := json.Unmarshal(value, &here); err != nil {
		return 0, err
	}
	for token := range pointer.Tokens() {
		switch inside := here.(type) {
		case map[string]any:
			here = inside[token]
		case []any:
			i, err := strconv.Atoi(token)
			if err != nil || i < 0 || i >= len(inside) {
				return 0, fmt.Errorf("there is no item %q", token)
			}
			here = inside[i]
		default:
			return 0, fmt.Errorf("there is nothing at %q", token)
		}
	}
	number, is := here.(float64)
	if !is {
		return 0, fmt.Errorf("there is no number")
	}
	return number, nil
}
