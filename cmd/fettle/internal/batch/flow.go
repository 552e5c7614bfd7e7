package batch

import (
	"context"
	"io"
	"sync"
	"sync/atomic"

	"fettle/filter"
)

// block is how many frames are moved at a time.
const block = 4096

// share is the least that pays for a goroutine of its own, in frames.
const share = 1 << 16

// flow moves a recording through its filter, slab by slab. A worker takes a slab from
// reading to writing, so that it stays in the caches of one core. What depends on
// what came before, workers do in turn: reading with its hash, which takes about a
// quarter of the time at 4095 taps, and writing with its own, a third. So more than
// four workers help long kernels only.
type flow struct {
	ctx       context.Context
	slabs     *filter.Slabs
	outputs   *outputs
	begun     atomic.Int64 // slabs
	reading   *queue
	filtering *queue
	writing   *queue
	err       error // of the first slab that failed, io.EOF after the last; for whoever's turn it is to write
}

// run moves everything, on so many goroutines.
func (f *flow) run(workers int) error {
	f.reading, f.filtering, f.writing = newQueue(), newQueue(), newQueue()
	var others sync.WaitGroup
	for range workers - 1 {
		others.Go(f.work)
	}
	f.work()
	others.Wait()
	if f.err == io.EOF {
		return nil
	}
	return f.err
}

// work moves slabs until there are no more, or one has failed.
func (f *flow) work() {
	slab, frames := f.slabs.New(), takeSamples(block*f.outputs.channels())
	defer f.slabs.Release(slab)
	defer giveSamples(frames)
	for ended := false; !ended; {
		number := f.begun.Add(1) - 1
		f.reading.await(number)
		err := f.read(slab)
		f.reading.next()
		f.filter(slab, number, err)
		f.writing.await(number)
		if f.err == nil {
			f.err = err
		}
		if f.err == nil {
			f.err = f.outputs.write(slab, frames)
		}
		ended = f.err != nil
		f.writing.next()
	}
}

func (f *flow) read(slab *filter.Slab) error {
	if err := f.ctx.Err(); err != nil {
		return err
	}
	return f.slabs.Read(slab)
}

// filter filters a slab that was read without an error.
func (f *flow) filter(slab *filter.Slab, number int64, err error) {
	if !f.slabs.Independent() {
		f.filtering.await(number)
		defer f.filtering.next()
	}
	if err == nil {
		f.slabs.Filter(slab)
	}
}
