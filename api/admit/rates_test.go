package admit

import (
	"fmt"
	"testing"
	"time"
)

func TestRatesAllowABurstAndThenTheRate(t *testing.T) {
	r := NewRates(10, 5)
	now := time.Unix(1_000_000, 0)
	allowed := 0
	for range 20 {
		if _, ok := r.Allow("a", now); ok {
			allowed++
		}
	}
	if allowed != 5 {
		t.Errorf("a burst of %d", allowed)
	}
	wait, ok := r.Allow("a", now)
	if ok || wait != 100*time.Millisecond {
		t.Errorf("wait %v, %v", wait, ok)
	}
	if _, ok := r.Allow("b", now); !ok {
		t.Error("one caller's burst counts for another")
	}
	if _, ok := r.Allow("a", now.Add(wait)); !ok {
		t.Error("refused after the wait that it was told")
	}
	for i := range 1000 { // twice the rate: half pass, and the refused are not charged
		if _, ok := r.Allow("c", now.Add(time.Duration(i)*50*time.Millisecond)); ok {
			allowed++
		}
	}
	if allowed < 5+500 || allowed > 5+506 {
		t.Errorf("%d of 1000 at twice the rate", allowed-5)
	}
}

func TestNoRateLetsEveryoneThrough(t *testing.T) {
	r := NewRates(0, 1)
	for range 1000 {
		if _, ok := r.Allow("a", time.Now()); !ok {
			t.Fatal("refused")
		}
	}
}

func TestTheCallerAwayLongestIsForgotten(t *testing.T) {
	r := NewRates(1, 1)
	r.most = 3
	now := time.Unix(1_000_000, 0)
	for i := range 3 {
		r.Allow(fmt.Sprint(i), now)
	}
	r.Allow("0", now) // refused, but here again
	r.Allow("3", now)
	if len(r.keys) != 3 || r.order.Len() != 3 {
		t.Errorf("%d keys, %d in order", len(r.keys), r.order.Len())
	}
	for key, want := range map[string]bool{"0": true, "1": false, "2": true, "3": true} {
		if _, known := r.keys[key]; known != want {
			t.Errorf("key %s: known %v", key, known)
		}
	}
}
