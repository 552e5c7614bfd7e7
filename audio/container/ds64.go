package container

import (
	"encoding/binary"
	"math"
)

// Sizes of a ds64 chunk's payload: what every one has, and a row of its table.
const (
	ds64Bytes    = 28
	ds64RowBytes = 12
)

// longSizes are the 64-bit sizes that a ds64 chunk gives (EBU Tech 3306; ITU-R
// BS.2088-2, 2.4). Each holds where a 32-bit field says FFFFFFFFh, only there.
type longSizes struct {
	form  int64 // of all that follows the first 8 bytes
	data  int64
	count int64 // of frames; BW64 has 0 there and ignores it
	table []longSize
}

// longSize is the size of a chunk that is neither the form nor the data.
type longSize struct {
	id   string
	size int64
}

// of is the size of the chunks of an id.
func (s *longSizes) of(id string) int64 {
	if s != nil && id == "data" {
		return s.data
	}
	if s != nil {
		for _, row := range s.table {
			if row.id == id {
				return row.size
			}
		}
	}
	return unknownSize
}

// payload is the ds64 chunk that says so.
func (s *longSizes) payload() []byte {
	le := binary.LittleEndian
	b := le.AppendUint64(nil, uint64(s.form))
	b = le.AppendUint64(b, uint64(s.data))
	b = le.AppendUint64(b, uint64(s.count))
	b = le.AppendUint32(b, uint32(len(s.table)))
	for _, row := range s.table {
		b = le.AppendUint64(append(b, row.id...), uint64(row.size))
	}
	return b
}

// ds64Chunk takes in the sizes of an RF64 or BW64 file.
func (p *parser) ds64Chunk(c *Chunk) error {
	if !p.layout.Form.long() || p.long != nil || p.dataAt != 0 {
		return p.otherChunk(c)
	}
	head := c.Offset - headerBytes
	if c.Size < ds64Bytes || !p.fits(*c) {
		return malformed(head, "a ds64 chunk of %d bytes, where %d are needed and %d are left; record or copy the file again", c.Size, ds64Bytes, p.size-c.Offset)
	}
	if len(p.layout.Chunks) > 0 {
		p.warn("byte %d: the ds64 chunk does not come first; used all the same", head)
	}
	var b [ds64Bytes]byte
	if err := p.read(b[:], c.Offset); err != nil {
		return err
	}
	p.long = &longSizes{form: size64(b[:]), data: size64(b[8:])}
	if p.formSaid == unknownSize {
		p.checkFormSize(c.Offset, p.long.form)
	}
	return p.longTable(*c, int64(binary.LittleEndian.Uint32(b[24:])))
}

// longTable reads the rows of a ds64 chunk, of which it says to have `said`.
func (p *parser) longTable(c Chunk, said int64) error {
	rows := min(said, (c.Size-ds64Bytes)/ds64RowBytes, maxChunks)
	if rows != said {
		p.warn("byte %d: the ds64 chunk says it has %d rows; %d are used", c.Offset+ds64Bytes-4, said, rows)
	}
	for i := range rows {
		var b [ds64RowBytes]byte
		if err := p.read(b[:], c.Offset+ds64Bytes+i*ds64RowBytes); err != nil {
			return err
		}
		p.long.table = append(p.long.table, longSize{string(b[:4]), size64(b[4:])})
	}
	return nil
}

// size64 reads a size, which no file exceeds that 63 bits cannot tell.
func size64(b []byte) int64 { return int64(min(binary.LittleEndian.Uint64(b), math.MaxInt64)) }
