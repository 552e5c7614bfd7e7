package atonce

import (
	"sync/atomic"
	"testing"
)

// TestDo: everything is done once, and no more at once than is allowed.
func TestDo(t *testing.T) {
	var now, most, done atomic.Int32
	Do(50, 2, func(i int) {
		if n := now.Add(1); n > most.Load() {
			most.Store(n)
		}
		done.Add(int32(i))
		now.Add(-1)
	})
	if done.Load() != 50*49/2 || most.Load() > 2 {
		t.Errorf("sum %d, %d at once", done.Load(), most.Load())
	}
}
