package admit

import (
	"context"
	"errors"
	"sync"
	"sync/atomic"
	"testing"
	"testing/synctest"
	"time"
)

// work solves in slices of a tenth of a millisecond with a checkpoint after each, as solvers do.
func work(h *Hold, length time.Duration) {
	for done := time.Duration(0); done < length; done += 100 * time.Microsecond {
		time.Sleep(100 * time.Microsecond)
		h.Checkpoint(time.Now())
	}
}

// do solves once and reports how long all of it took.
func do(t *testing.T, p *Pool, class Class, length time.Duration) (time.Duration, error) {
	began := time.Now()
	h := p.Hold(class)
	if err := h.Acquire(t.Context()); err != nil {
		return time.Since(began), err
	}
	work(h, length)
	h.Release()
	return time.Since(began), nil
}

func reason(err error) Reason {
	var refusal *Refusal
	if errors.As(err, &refusal) {
		return refusal.Reason
	}
	return ""
}

// idle fails unless all slots are free and nothing waits.
func idle(t *testing.T, p *Pool) {
	t.Helper()
	for _, c := range Classes() {
		if p.Held(c) != 0 || p.Waiting(c) != 0 {
			t.Errorf("%v: %d held, %d waiting", c, p.Held(c), p.Waiting(c))
		}
	}
	if p.free != p.settings.Slots || p.waiting.Load() != 0 || len(p.running) != 0 {
		t.Errorf("%d free, %d waiting, %d running", p.free, p.waiting.Load(), len(p.running))
	}
}

func TestNoMoreHoldersThanSlots(t *testing.T) {
	p := New(Settings{Slots: 3, Queue: 1000, Wait: time.Minute})
	var inside, done atomic.Int64
	var all sync.WaitGroup
	for i := range 60 {
		class := Classes()[i%3]
		all.Go(func() {
			h := p.Hold(class)
			for round := range 50 {
				ctx, cancel := context.WithCancel(t.Context())
				if (i+round)%7 == 0 {
					go cancel()
				}
				if h.Acquire(ctx) == nil {
					if n := inside.Add(1); n > 3 {
						t.Errorf("%d at once", n)
					}
					inside.Add(-1)
					p.mutex.Lock()
					h.since -= time.Second // as if it had been held for long: it gives way wherever somebody waits
					p.mutex.Unlock()
					h.Checkpoint(time.Now())
					if n := inside.Add(1); n > 3 {
						t.Errorf("%d at once", n)
					}
					inside.Add(-1)
					h.Release()
					done.Add(1)
				}
				cancel()
			}
		})
	}
	all.Wait()
	if done.Load() < 60*50*5/7 {
		t.Errorf("only %d came in", done.Load())
	}
	idle(t, p)
}

func TestAFullLineRefusesAtOnce(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		p := New(Settings{Slots: 1, Queue: 3, Wait: time.Second})
		var all sync.WaitGroup
		if p.Full(Long) != nil {
			t.Error("full with a free slot")
		}
		for range 4 {
			all.Go(func() { do(t, p, Long, 10*time.Millisecond) })
		}
		synctest.Wait()
		if p.Waiting(Long) != 3 || p.Held(Long) != 1 {
			t.Fatalf("%d waiting, %d held", p.Waiting(Long), p.Held(Long))
		}
		if took, err := do(t, p, Long, 0); reason(err) != LineFull || took != 0 {
			t.Errorf("%v after %v", err, took)
		}
		if r := p.Full(Long); r == nil || r.Reason != LineFull || r.Waiting != 3 {
			t.Errorf("%v", r)
		}
		if p.Full(Short) != nil || p.Full(Bulk) != nil {
			t.Error("the line of one class keeps others out")
		}
		all.Wait()
		idle(t, p)
	})
}

// Whoever would wait too long by what solves took lately is refused at once, however many places there are.
func TestALongWaitIsRefusedAtOnce(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		p := New(Settings{Slots: 2, Queue: 1000, Wait: 200 * time.Millisecond})
		do(t, p, Long, 10*time.Millisecond)
		var all sync.WaitGroup
		var refused atomic.Int64
		for range 100 {
			all.Go(func() {
				took, err := do(t, p, Long, 10*time.Millisecond)
				switch {
				case err == nil && took > 70*time.Millisecond:
					t.Errorf("let in, and took %v", took)
				case err != nil && (reason(err) != LongWait || took != 0):
					t.Errorf("%v after %v", err, took)
				case err != nil:
					refused.Add(1)
				}
			})
		}
		all.Wait()
		if n := refused.Load(); n != 100-2-10 { // 10 waiting need 50 ms of two slots
			t.Errorf("%d refused", n)
		}
		idle(t, p)
	})
}

func TestNobodyWaitsLongerThanTheGreatestWait(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		p := New(Settings{Slots: 1, Queue: 10, Wait: 50 * time.Millisecond})
		h := p.Hold(Bulk)
		if err := h.Acquire(t.Context()); err != nil {
			t.Fatal(err)
		}
		if took, err := do(t, p, Short, 0); reason(err) != WaitedLong || took != 50*time.Millisecond {
			t.Errorf("%v after %v", err, took)
		}
		go func() {
			time.Sleep(time.Hour)
			h.Release()
		}()
		if took, err := do(t, p, Bulk, 0); err != nil || took != time.Hour {
			t.Errorf("bulk: %v after %v", err, took)
		}
		idle(t, p)
	})
}

func TestWhoGoesAwayLeavesTheLine(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		p := New(Settings{Slots: 1, Queue: 10, Wait: time.Minute})
		held := p.Hold(Short)
		if err := held.Acquire(t.Context()); err != nil {
			t.Fatal(err)
		}
		for _, c := range Classes() {
			ctx, cancel := context.WithTimeout(t.Context(), time.Second)
			if err := p.Hold(c).Acquire(ctx); !errors.Is(err, context.DeadlineExceeded) {
				t.Error(err)
			}
			cancel()
		}
		held.Release()
		idle(t, p)
		gone, cancel := context.WithCancel(t.Context())
		cancel()
		if err := held.Acquire(gone); !errors.Is(err, context.Canceled) {
			t.Error(err)
		}
		idle(t, p)
	})
}

// Two classes that both want all they can get have the same time of the slots, though one asks with many more and holds longer at a time.
func TestClassesShareEqually(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		p := New(Settings{Slots: 2, Queue: 100, Wait: time.Second})
		ctx, cancel := context.WithTimeout(t.Context(), 10*time.Second)
		defer cancel()
		var held [classCount]atomic.Int64
		var all sync.WaitGroup
		run := func(class Class, times int, length time.Duration, checks bool) {
			for range times {
				all.Go(func() {
					h := p.Hold(class)
					for ctx.Err() == nil {
						if h.Acquire(ctx) != nil {
							continue
						}
						for done := time.Duration(0); done < length; done += 100 * time.Microsecond {
							time.Sleep(100 * time.Microsecond)
							held[class].Add(int64(100 * time.Microsecond))
							if checks {
								h.Checkpoint(time.Now())
							}
						}
						h.Release()
					}
				})
			}
		}
		run(Short, 4, 200*time.Microsecond, false)
		run(Long, 8, 15*time.Millisecond, true)
		run(Bulk, 50, 5*time.Millisecond, false)
		all.Wait()
		for _, c := range Classes() {
			if share := float64(held[c].Load()) / float64(20*time.Second); !(share > 0.31 && share < 0.36) {
				t.Errorf("%v had %.3f of the slots", c, share)
			}
		}
		idle(t, p)
	})
}

// A solve of many seconds does not keep short ones waiting, and goes on by itself when nobody else is there.
func TestALongSolveGivesWay(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		p := New(Settings{Slots: 1, Queue: 10, Wait: time.Second})
		var took time.Duration
		var all sync.WaitGroup
		all.Go(func() { took, _ = do(t, p, Long, time.Second) })
		synctest.Wait()
		for range 20 {
			time.Sleep(10 * time.Millisecond)
			if took, err := do(t, p, Short, 500*time.Microsecond); err != nil || took > 3*time.Millisecond {
				t.Errorf("%v after %v", err, took)
			}
		}
		all.Wait()
		if least := time.Second + 20*500*time.Microsecond; took < least || took > least+time.Millisecond {
			t.Errorf("the long solve took %v", took)
		}
		idle(t, p)
	})
}

// What has begun ends before something new of its class begins.
func TestOneThatGaveWayComesFirst(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		p := New(Settings{Slots: 1, Queue: 10, Wait: time.Minute})
		var order []string
		var mutex sync.Mutex
		var all sync.WaitGroup
		ended := func(name string) {
			mutex.Lock()
			defer mutex.Unlock()
			order = append(order, name)
		}
		all.Go(func() { do(t, p, Long, 50*time.Millisecond); ended("first") })
		time.Sleep(2 * time.Millisecond)
		all.Go(func() { do(t, p, Long, 10*time.Millisecond); ended("second") })
		time.Sleep(2 * time.Millisecond)
		all.Go(func() { do(t, p, Short, time.Millisecond); ended("short") })
		all.Wait()
		if len(order) != 3 || order[0] != "short" || order[1] != "first" || order[2] != "second" {
			t.Error(order)
		}
		idle(t, p)
	})
}

// A class that wanted nothing for a long time has saved nothing up.
func TestIdlenessIsNotSaved(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		p := New(Settings{Slots: 1, Queue: 10, Wait: time.Hour})
		for range 100 {
			do(t, p, Long, time.Second)
		}
		var long time.Duration
		var all sync.WaitGroup
		ctx, cancel := context.WithCancel(t.Context())
		for range 2 {
			all.Go(func() {
				h := p.Hold(Bulk)
				for ctx.Err() == nil {
					if h.Acquire(ctx) == nil {
						time.Sleep(5 * time.Millisecond)
						h.Release()
					}
				}
			})
		}
		synctest.Wait()
		long, _ = do(t, p, Long, 100*time.Millisecond)
		if long > 230*time.Millisecond {
			t.Errorf("against bulk it took %v", long)
		}
		cancel()
		all.Wait()
		idle(t, p)
	})
}

func TestSilenceIsSinceTheLastSignOfLife(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		p := New(Settings{Slots: 2, Queue: 10, Wait: time.Second})
		if p.Silence() != 0 {
			t.Error("no slot is held")
		}
		a, b := p.Hold(Long), p.Hold(Bulk)
		a.Acquire(t.Context())
		time.Sleep(time.Second)
		b.Acquire(t.Context())
		time.Sleep(time.Second)
		if s := p.Silence(); s != 2*time.Second {
			t.Error(s)
		}
		a.Checkpoint(time.Now())
		if s := p.Silence(); s != time.Second {
			t.Error(s)
		}
		a.Release()
		b.Release()
		if p.Silence() != 0 {
			t.Error("no slot is held any more")
		}
		idle(t, p)
	})
}

func TestPausesDiffer(t *testing.T) {
	seen := map[int]bool{}
	for range 200 {
		seen[Pause(1500*time.Millisecond)] = true
	}
	if len(seen) != 3 || !seen[2] || !seen[3] || !seen[4] {
		t.Error(seen)
	}
	if Pause(0) < 1 {
		t.Error("no pause")
	}
}

func TestPlacesAreBounded(t *testing.T) {
	p := NewPlaces(2)
	var taken int
	for range 3 {
		if p.Take() {
			taken++
		}
	}
	if taken != 2 || p.Taken() != 2 {
		t.Errorf("took %d of two places, %d are told", taken, p.Taken())
	}
	p.Leave()
	if !p.Take() {
		t.Error("a place that was given back")
	}
}

func BenchmarkFreeSlot(b *testing.B) {
	p := New(Settings{Slots: 2, Queue: 10, Wait: time.Second})
	h := p.Hold(Short)
	for b.Loop() {
		if h.Acquire(b.Context()) != nil {
			b.Fatal("no slot")
		}
		h.Release()
	}
}

func BenchmarkCheckpoint(b *testing.B) {
	p := New(Settings{Slots: 2, Queue: 10, Wait: time.Second})
	h := p.Hold(Long)
	h.Acquire(b.Context())
	for b.Loop() {
		h.Checkpoint(time.Now())
	}
	h.Release()
}
