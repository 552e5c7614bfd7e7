package main

import (
	"os"
	"runtime"
	"runtime/debug"
	"runtime/metrics"
	"sync"
	"sync/atomic"
)

// The memory that the program may fill before it looks for what it can use again.
// A recording leaves a megabyte or two of buffers behind, so with the runtime's own
// rule, which is twice what is in use, a batch of short recordings would spend a
// third of its time looking.
const (
	baseMemory = 32 << 20
	jobMemory  = 16 << 20
)

// boundMemory makes the runtime collect garbage when the bound for so many jobs is
// near, and not before. What is in use may need more, as for the audit of a very
// long kernel: then the bound is a quarter more. The user's own GOGC and
// GOMEMLIMIT stand.
func boundMemory(jobs int) {
	if os.Getenv("GOGC") != "" || os.Getenv("GOMEMLIMIT") != "" {
		return
	}
	least := int64(baseMemory + jobs*jobMemory)
	debug.SetMemoryLimit(least)
	leastMemory.Store(least)
	boundOnce.Do(func() {
		debug.SetGCPercent(-1)
		afterEachCollection(func() {
			live := []metrics.Sample{{Name: "/gc/heap/live:bytes"}}
			metrics.Read(live)
			debug.SetMemoryLimit(max(leastMemory.Load(), int64(live[0].Value.Uint64())*5/4))
		})
	})
}

var (
	leastMemory atomic.Int64
	boundOnce   sync.Once
)

// afterEachCollection runs do whenever garbage was collected: when an object that
// nothing holds is found, and then its successor.
func afterEachCollection(do func()) {
	runtime.SetFinalizer(&[16]byte{}, func(*[16]byte) {
		do()
		afterEachCollection(do)
	})
}
