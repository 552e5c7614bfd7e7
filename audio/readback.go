package audio

import (
	"cmp"
	"errors"
	"fmt"
	"hash/maphash"
	"io"
	"os"
	"sync"
	"sync/atomic"
)

// sectionBytes is how much of a file has a hash of its own, so that several
// goroutines can read it back.
const sectionBytes = 1 << 22

// sections hashes bytes that go by. A keyed hash of 64 bits, many times as fast as
// SHA-256, is enough to compare what was sent with what is there.
type sections struct {
	hash maphash.Hash
	size int64    // of all
	sums []uint64 // of whole sections
}

func (s *sections) Write(b []byte) {
	for len(b) > 0 {
		n := min(len(b), sectionBytes-int(s.size%sectionBytes))
		s.hash.Write(b[:n])
		b, s.size = b[n:], s.size+int64(n)
		if s.size%sectionBytes == 0 {
			s.sums = append(s.sums, s.hash.Sum64())
			s.hash.Reset()
		}
	}
}

// sum is that of a section, the last one not being whole.
func (s *sections) sum(i int) uint64 {
	if i < len(s.sums) {
		return s.sums[i]
	}
	return s.hash.Sum64()
}

// errAltered says that a file holds other bytes than were sent to it.
var errAltered = errors.New("read back, it is not what was written; check the disk and the memory")

// readBack compares a file with what was sent, on so many goroutines. The first one
// reads into buffer.
func (s *sections) readBack(path string, workers int, buffer []byte) error {
	f, err := os.Open(path)
	if err != nil {
		return unreadable(err)
	}
	defer f.Close()
	info, err := f.Stat()
	if err != nil {
		return unreadable(err)
	}
	if info.Size() != s.size {
		return errAltered
	}
	count := len(s.sums) + 1
	failed := make([]error, min(workers, count))
	var next atomic.Int64
	var wg sync.WaitGroup
	for w := range failed {
		room := buffer
		if w > 0 {
			room = takeBuffer(len(buffer))
			defer giveBuffer(room)
		}
		wg.Go(func() {
			for i := int(next.Add(1)) - 1; i < count && failed[w] == nil; i = int(next.Add(1)) - 1 {
				failed[w] = s.compare(f, i, room)
			}
		})
	}
	wg.Wait()
	return cmp.Or(failed...)
}

// compare compares one section.
func (s *sections) compare(f *os.File, i int, buffer []byte) error {
	var there maphash.Hash
	there.SetSeed(s.hash.Seed())
	from := int64(i) * sectionBytes
	_, err := io.CopyBuffer(struct{ io.Writer }{&there}, io.NewSectionReader(f, from, sectionBytes), buffer)
	if err != nil {
		return unreadable(err)
	}
	if there.Sum64() != s.sum(i) {
		return errAltered
	}
	return nil
}

func unreadable(err error) error {
	return fmt.Errorf("cannot be read back: %w; check the disk", bare(err))
}
