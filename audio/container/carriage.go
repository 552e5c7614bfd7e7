package container

import (
	"bytes"
	"io"
)

// Change is what was done to a recording, as far as its chunks are concerned.
type Change struct {
	Format  Format // of the output
	From    int64  // the original's frame that is the output's first
	Frames  int64  // of the output; all of the original's, unless it is a stretch
	Samples bool   // the values of samples have changed
	// Text says what was done, for the coding history. Characters that may not
	// stand there are replaced. If it is empty no row is added.
	Text string
}

// Note tells what became of a chunk of the original.
type Note struct {
	Chunk string `json:"chunk"` // its id, of a LIST with its type: LIST/INFO
	Why   string `json:"why"`   // empty if there is nothing to say
}

// Carriage is what of an original's chunks goes into an output, in order. It
// reads from the original, which must stay open while outputs are written.
// Chunks that make up the container (fmt, fact, data, ds64 and the room kept
// for it) are made anew and not listed.
type Carriage struct {
	Kept      []Note `json:"kept"` // byte for byte
	Corrected []Note `json:"corrected"`
	Dropped   []Note `json:"dropped"`

	head, tail []part // before the data and after
	bw64       bool   // the original is BW64
	chna       bool   // a chna chunk is carried
}

// part is a chunk to be written. Of fmt and fact only the place is known here.
type part struct {
	id           string
	from         io.ReaderAt
	offset, size int64
}

func (p part) payload() io.Reader { return io.NewSectionReader(p.from, p.offset, p.size) }

// inMemory is a part whose payload is b.
func inMemory(id string, b []byte) part { return part{id, bytes.NewReader(b), 0, int64(len(b))} }

// Fresh is a carriage for a file that has no original: one chunk of id, 4 printable
// characters, stands between the fmt chunk and the samples.
func Fresh(id string, payload []byte) *Carriage {
	return &Carriage{head: []part{{id: "fmt "}, inMemory(id, payload)}}
}
