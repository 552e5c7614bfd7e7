package batch

import (
	"runtime"
	"sync"
	"sync/atomic"
)

// queue lets numbers pass in their order, from 0 on.
type queue struct {
	turn  atomic.Int64
	mu    sync.Mutex // for those who sleep
	moved *sync.Cond
}

func newQueue() *queue {
	q := &queue{}
	q.moved = sync.NewCond(&q.mu)
	return q
}

// patience is how often a queue is looked at before sleeping: for some 50 µs. Turns are
// tenths of a millisecond, and most waits much shorter; to go to sleep and be woken
// costs a thread as long.
const patience = 200

// await returns when it is the number's turn.
func (q *queue) await(number int64) {
	for range patience {
		if q.turn.Load() == number {
			return
		}
		runtime.Gosched()
	}
	q.mu.Lock()
	defer q.mu.Unlock()
	for q.turn.Load() != number {
		q.moved.Wait()
	}
}

// next ends the turn.
func (q *queue) next() {
	q.mu.Lock()
	q.turn.Add(1)
	q.mu.Unlock()
	q.moved.Broadcast()
}
