package audio

import "sync"

// buffers are for reading and writing files: batches open thousands of small ones.
var buffers = sync.Pool{New: func() any { return new([bufferBytes]byte) }}

// takeBuffer returns n bytes that hold anything.
func takeBuffer(n int) []byte {
	if n > bufferBytes {
		return make([]byte, n)
	}
	return buffers.Get().(*[bufferBytes]byte)[:n]
}

// giveBuffer takes one back, or nil. Nobody may use it any more.
func giveBuffer(b []byte) {
	if cap(b) == bufferBytes {
		buffers.Put((*[bufferBytes]byte)(b[:bufferBytes]))
	}
}
