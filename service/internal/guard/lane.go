// Package guard protects the service from its callers and from itself: limits on requests, as much work at once as there are processors,
// a short queue, a deadline on everything, and panics that end one call instead of all.
package guard

import (
	"context"
	"sync"
)

// Lanes keep what takes a millisecond apart from what takes a second, so that neither waits for the other.
type Lanes struct {
	ClosedForm *Lane
	Simulation *Lane // simulated switching events, and studies
}

// Lane lets as many calls through at once as it is wide and lets a bounded number wait, in the order of their arrival.
type Lane struct {
	width, depth int
	changed      func(waiting, running int)

	mu      sync.Mutex
	running int
	queue   []chan struct{} // closed when its turn has come
}

// NewLane returns a lane of that width and depth of queue. changed is told, in order, of every change in the calls that wait and run.
func NewLane(width, depth int, changed func(waiting, running int)) *Lane {
	return &Lane{width: width, depth: depth, changed: changed}
}

// Enter waits for a place. It fails at once with errFull where the queue is full, and with the context's error where that ends first. Each
// success is to be followed by one Leave.
func (l *Lane) Enter(ctx context.Context) error {
	if err := ctx.Err(); err != nil {
		return err
	}
	l.mu.Lock()
	if l.running < l.width {
		l.running++
		l.tell()
		l.mu.Unlock()
		return nil
	}
	if len(l.queue) >= l.depth {
		l.mu.Unlock()
		return errFull
	}
	turn := make(chan struct{})
	l.queue = append(l.queue, turn)
	l.tell()
	l.mu.Unlock()
	select {
	case <-turn:
		return nil
	case <-ctx.Done():
	}
	l.mu.Lock()
	defer l.mu.Unlock()
	for i, other := range l.queue {
		if other == turn {
			l.queue = append(l.queue[:i], l.queue[i+1:]...)
			l.tell()
			return ctx.Err()
		}
	}
	// The turn came in the same moment: it is passed on.
	l.next()
	return ctx.Err()
}

// Leave gives the place to the next call that waits.
func (l *Lane) Leave() {
	l.mu.Lock()
	defer l.mu.Unlock()
	l.next()
}

// next hands one place on; the caller holds the lock.
func (l *Lane) next() {
	if len(l.queue) > 0 {
		close(l.queue[0])
		l.queue = l.queue[1:]
	} else {
		l.running--
	}
	l.tell()
}

func (l *Lane) tell() { l.changed(len(l.queue), l.running) }
