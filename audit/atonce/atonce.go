// Package atonce does several things at a time.
package atonce

import (
	"runtime"
	"sync"
)

// Do does n things, at most so many at once and no more than there are processors, and
// returns when all are done.
func Do(n, most int, do func(i int)) {
	slots := make(chan struct{}, min(most, runtime.GOMAXPROCS(0)))
	var wait sync.WaitGroup
	for i := range n {
		slots <- struct{}{}
		wait.Go(func() {
			do(i)
			<-slots
		})
	}
	wait.Wait()
}
