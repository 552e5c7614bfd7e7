package estimate

import "sync"

// Kept holds what is dear to make and can serve again, by size. The zero Kept is of no
// use; Make must be set before Take. For concurrent use.
type Kept[T any] struct {
	Make  func(size int) T
	pools sync.Map // of *sync.Pool by size
}

// Take gives one of a size that nobody else has.
func (k *Kept[T]) Take(size int) T {
	if pool, ok := k.pools.Load(size); ok {
		if kept, ok := pool.(*sync.Pool).Get().(T); ok {
			return kept
		}
	}
	return k.Make(size)
}

// Give takes one of a size back; the giver must not use it any more.
func (k *Kept[T]) Give(size int, v T) {
	pool, _ := k.pools.LoadOrStore(size, new(sync.Pool))
	pool.(*sync.Pool).Put(v)
}
