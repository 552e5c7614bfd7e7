package container

import (
	"bufio"
	"encoding/binary"
	"fmt"
	"io"
	"slices"
)

// maxRIFF is the largest file whose size a RIFF header can tell; FFFFFFFFh
// itself means unknown.
const maxRIFF = headerBytes + unknownSize - 1

// Pad is the number of bytes, 0 or 1, to be written after a payload of n bytes.
func Pad(n int64) int { return int(n & 1) }

// Plan says what a WAV file is to hold.
type Plan struct {
	Format Format
	// Fmt, if not nil, is written as the fmt chunk and must say the same as
	// Format does of coding, channels, rate, container and valid bits. Otherwise
	// the plainest fmt is made that the standard allows: tag PCM with 16 bytes, or
	// tag IEEE float with 18, for 1 or 2 channels without a channel mask and, if
	// PCM, 8 or 16 bits that fill their container; EXTENSIBLE in all other cases.
	// Format's Tag and SubFormat are not looked at. Without a mask EXTENSIBLE
	// mono is front centre, stereo front left and right, and more channels are
	// unassigned.
	Fmt      []byte
	Frames   int64     // exactly so many will be written
	Carriage *Carriage // nil: no other chunks
	// Limit is the size in bytes beyond which the file is RF64 and not RIFF; 0 or
	// more than 4 GiB: 4 GiB, the most that RIFF can tell.
	Limit int64
}

// Outline is all of a WAV file but its samples.
//
// It is RIFF as long as it keeps within the limit, and RF64 beyond; BW64 if the
// original was, and beyond the limit if it carries a chna chunk. A RIFF file
// begins with a JUNK chunk of the size of a ds64, so that a program that makes
// it longer can turn it into RF64 in place (EBU Tech 3306).
type Outline struct {
	form       Form
	head, tail []part // before the data and after
	data, size int64  // bytes of the samples and of the whole file
}

// Outline arranges the file. It fails if the format cannot be written, if Fmt
// contradicts it, and if there are more bytes than 64-bit sizes can tell.
func (p Plan) Outline() (*Outline, error) {
	if err := checkWritable(p.Format, p.Frames); err != nil {
		return nil, err
	}
	fmtChunk := p.Fmt
	if fmtChunk == nil {
		fmtChunk = makeFmt(p.Format)
	} else if err := checkAgrees(p.Format, fmtChunk); err != nil {
		return nil, err
	}
	c := p.Carriage
	if c == nil {
		c = &Carriage{head: []part{{id: "fmt "}}}
	}
	o := &Outline{head: headParts(c, fmtChunk, p.Frames), tail: c.tail, data: p.Frames * int64(p.Format.FrameBytes())}
	o.settle(c, p)
	return o, nil
}

// headParts fills in the chunks that are made anew.
func headParts(c *Carriage, fmtChunk []byte, frames int64) (head []part) {
	fact := inMemory("fact", binary.LittleEndian.AppendUint32(nil, uint32(min(frames, unknownSize))))
	needed := binary.LittleEndian.Uint16(fmtChunk) != TagPCM && !slices.ContainsFunc(c.head, part.isFact)
	for _, p := range c.head {
		switch {
		case p.isFact():
			head = append(head, fact)
		case p.id != "fmt ":
			head = append(head, p)
		default:
			head = append(head, inMemory(p.id, fmtChunk))
			if needed {
				head = append(head, fact)
			}
		}
	}
	return head
}

func (p part) isFact() bool { return p.id == "fact" }

// settle chooses the form by the size, and makes the chunk that stands first.
func (o *Outline) settle(c *Carriage, p Plan) {
	long := longSizes{data: o.data, count: p.Frames}
	o.size = formBytes + chunkBytes(o.data)
	for _, p := range slices.Concat(o.head, o.tail) {
		o.size += chunkBytes(p.size)
		if p.size >= unknownSize {
			long.table = append(long.table, longSize{p.id, p.size})
		}
	}
	o.size += chunkBytes(int64(ds64Bytes + ds64RowBytes*len(long.table)))
	long.form = o.size - headerBytes
	if o.form = p.form(c, o.size); o.form == BW64 {
		long.count = 0
	}
	first := inMemory("ds64", long.payload())
	if o.form == RIFF {
		first = inMemory("JUNK", make([]byte, ds64Bytes))
	}
	o.head = slices.Insert(o.head, 0, first)
}

// form is what a file of a size becomes.
func (p Plan) form(c *Carriage, size int64) Form {
	limit := min(p.Limit, maxRIFF)
	if limit <= 0 {
		limit = maxRIFF
	}
	switch {
	case c.bw64:
		return BW64
	case size <= limit:
		return RIFF
	case c.chna:
		return BW64
	}
	return RF64
}

// chunkBytes is what a chunk with a payload of n bytes takes.
func chunkBytes(n int64) int64 { return headerBytes + n + int64(Pad(n)) }

// Form is the form of the file.
func (o *Outline) Form() Form { return o.form }

// Size is the size of the whole file in bytes.
func (o *Outline) Size() int64 { return o.size }

// WriteHead writes all that stands before the samples. An error is the
// writer's, or one of reading the original.
func (o *Outline) WriteHead(w io.Writer) error {
	return buffered(w, func(w *bufio.Writer) error {
		o.header(w, string(o.form), o.size-headerBytes)
		w.WriteString("WAVE")
		if err := o.parts(w, o.head); err != nil {
			return err
		}
		o.header(w, "data", o.data)
		return nil
	})
}

// WriteTail writes all that stands behind the samples.
func (o *Outline) WriteTail(w io.Writer) error {
	return buffered(w, func(w *bufio.Writer) error {
		w.Write(make([]byte, Pad(o.data)))
		return o.parts(w, o.tail)
	})
}

// buffered lets write use a buffer, which keeps an error of writing for Flush.
func buffered(w io.Writer, write func(*bufio.Writer) error) error {
	b := bufio.NewWriterSize(w, 1<<16)
	if err := write(b); err != nil {
		return err
	}
	return b.Flush()
}

// header writes the first 8 bytes of the form or of a chunk. In the 64-bit forms
// ds64 has the size of the form and of the data, however small.
func (o *Outline) header(w *bufio.Writer, id string, size int64) {
	if o.form.long() && (id == string(o.form) || id == "data") {
		size = unknownSize
	}
	w.WriteString(id)
	w.Write(binary.LittleEndian.AppendUint32(nil, uint32(min(size, unknownSize))))
}

func (o *Outline) parts(w *bufio.Writer, parts []part) error {
	for _, p := range parts {
		o.header(w, p.id, p.size)
		if _, err := io.CopyN(w, p.payload(), p.size); err == io.EOF {
			return fmt.Errorf("the original ends inside the chunk %q: %w", p.id, io.ErrUnexpectedEOF)
		} else if err != nil {
			return err
		}
		w.Write(make([]byte, Pad(p.size)))
	}
	return nil
}
