package container

import (
	"bytes"
	"encoding/binary"
	"fmt"
	"io"
)

const (
	formBytes   = 12 // RIFF, size, WAVE
	headerBytes = 8  // id, size
	// unknownSize is what a program writes that cannot seek back.
	unknownSize = 1<<32 - 1
	// maxChunks bounds the chunk table. Real files have a few dozen.
	maxChunks = 4096
)

// Parse walks the chunks of a WAV file of `size` bytes and returns where they
// are. Every size in the file is checked against the file; what can be put
// right is put right with a warning:
//
//   - a data size that is unknown (FFFFFFFFh), or that reaches beyond the end,
//     stands for all whole frames up to the end; so does a data size of 0 that
//     something other than chunks follows,
//   - bytes after the last whole frame, and bytes after the data that are no
//     chunk, are left out,
//   - a missing pad byte, a wrong size in the form header, a wrong byte rate.
//
// Anything else is an [*Error]: [ErrMalformed] or [ErrUnsupported], or the
// cause of a read that failed. A file without a single frame is malformed.
func Parse(r io.ReaderAt, size int64) (*Layout, error) {
	p := &parser{r: r, size: size}
	if err := p.form(); err != nil {
		return nil, err
	}
	for pos := int64(formBytes); pos < size; {
		next, err := p.chunk(pos)
		if err != nil {
			return nil, err
		}
		pos = next
	}
	if err := p.settle(); err != nil {
		return nil, err
	}
	return &p.layout, nil
}

type parser struct {
	r      io.ReaderAt
	size   int64
	layout Layout
	// Offsets of the payloads, 0 while not found, and the data size as stored.
	fmtAt, dataAt, dataSaid int64
}

func (p *parser) warn(format string, args ...any) {
	p.layout.Warnings = append(p.layout.Warnings, fmt.Sprintf(format, args...))
}

// read fills b from byte `at`. The caller has checked that the file is that long.
func (p *parser) read(b []byte, at int64) error {
	n, err := p.r.ReadAt(b, at)
	if n == len(b) {
		return nil
	}
	if err == io.EOF {
		err = io.ErrUnexpectedEOF
	}
	return unreadable(at+int64(n), err)
}

// form checks the form header.
func (p *parser) form() error {
	if p.size == 0 {
		return malformed(0, "the file is empty; record or copy it again")
	}
	b := make([]byte, min(p.size, formBytes))
	if err := p.read(b, 0); err != nil {
		return err
	}
	if err := checkFormID(b); err != nil {
		return err
	}
	if p.size < formBytes {
		return malformed(p.size, "the file ends inside the %d-byte RIFF header; record or copy it again", formBytes)
	}
	if kind := b[8:]; !bytes.Equal(kind, []byte("WAVE")) {
		return malformed(8, "a RIFF file of type %q, not WAVE; only WAV recordings are read", kind)
	}
	said, is := int64(binary.LittleEndian.Uint32(b[4:])), p.size-headerBytes
	// A last pad byte is counted by some programs and not by others.
	if said != is && said+said&1 != is {
		p.warn("byte 4: the RIFF header says %d bytes follow, the file has %d; ignored", said, is)
	}
	return nil
}

// checkFormID looks at the first bytes of a file, of which there is at least one.
func checkFormID(b []byte) error {
	id := string(b[:min(4, len(b))])
	switch id {
	case "RIFF":
		return nil
	case "RF64", "BW64":
		return unsupported(0, "%s (WAV with 64-bit sizes) is not read yet; split the recording into RIFF files under 4 GiB", id)
	case "RIFX":
		return unsupported(0, "RIFX (big-endian WAV) is not read; convert the recording to little-endian RIFF")
	}
	for _, f := range foreignForms {
		if bytes.HasPrefix(b, []byte(f.magic)) {
			return malformed(0, "not a WAV file but %s; convert it to WAV first", f.name)
		}
	}
	return malformed(0, "not a WAV file: it begins with %q, not \"RIFF\"; give a WAV recording", id)
}

// chunk takes in the chunk whose header stands at pos and tells where the next
// one is to be looked for, which is beyond pos.
func (p *parser) chunk(pos int64) (next int64, err error) {
	c, plausible, err := p.header(pos)
	if err != nil {
		return 0, err
	}
	if !plausible {
		return p.size, p.stray(pos)
	}
	if len(p.layout.Chunks) == maxChunks {
		return 0, unsupported(pos, "more than %d chunks; the file is damaged or was not meant as a recording", maxChunks)
	}
	switch c.ID {
	case "fmt ":
		err = p.fmtChunk(c)
	case "data":
		err = p.dataChunk(&c)
	default:
		err = p.otherChunk(&c)
	}
	if err != nil {
		return 0, err
	}
	p.layout.Chunks = append(p.layout.Chunks, c)
	return p.next(c)
}

// header reads the 8 bytes at pos. They are plausible as the head of a chunk if
// they are all there and the id is printable ASCII; the size may be anything.
func (p *parser) header(pos int64) (c Chunk, plausible bool, err error) {
	if pos+headerBytes > p.size {
		return c, false, nil
	}
	var b [headerBytes]byte
	if err := p.read(b[:], pos); err != nil {
		return c, false, err
	}
	for _, ch := range b[:4] {
		if ch < ' ' || ch > '~' {
			return c, false, nil
		}
	}
	return Chunk{string(b[:4]), pos + headerBytes, int64(binary.LittleEndian.Uint32(b[4:]))}, true, nil
}

// fits tells whether all of a chunk's payload is in the file.
func (p *parser) fits(c Chunk) bool { return c.Size <= p.size-c.Offset }

// stray deals with bytes at pos that are no chunk.
func (p *parser) stray(pos int64) error {
	left := p.size - pos
	switch {
	case p.dataAt != 0:
		p.warn("byte %d: the last %d bytes of the file are no chunk; ignored", pos, left)
		return nil
	case left < headerBytes:
		return malformed(pos, "the file ends inside a chunk header, before any samples; record or copy it again")
	}
	return malformed(pos, "no chunk where one must begin, before any samples; the file is damaged, copy it again")
}

func (p *parser) fmtChunk(c Chunk) error {
	head := c.Offset - headerBytes
	switch {
	case p.fmtAt != 0:
		return malformed(head, "a second fmt chunk, the first is at byte %d; export the recording again", p.fmtAt-headerBytes)
	case c.Size < fmtPlain || c.Size > fmtMax:
		return malformed(head, "a fmt chunk of %d bytes, where %d, %d or %d are usual; export the recording again", c.Size, fmtPlain, fmtSized, fmtExtensible)
	case !p.fits(c):
		return malformed(head, "the file ends inside the fmt chunk; record or copy it again")
	}
	raw := make([]byte, c.Size)
	if err := p.read(raw, c.Offset); err != nil {
		return err
	}
	f, warnings, err := parseFormat(raw, c.Offset)
	if err != nil {
		return err
	}
	p.fmtAt, p.layout.Format, p.layout.Fmt = c.Offset, f, raw
	p.layout.Warnings = append(p.layout.Warnings, warnings...)
	return nil
}

func (p *parser) dataChunk(c *Chunk) error {
	if p.dataAt != 0 {
		p.warn("byte %d: a second data chunk; ignored", c.Offset-headerBytes)
		return p.otherChunk(c)
	}
	p.dataAt, p.dataSaid = c.Offset, c.Size
	open := c.Size == unknownSize || !p.fits(*c)
	if c.Size == 0 {
		only, err := p.onlyChunks(c.Offset)
		if err != nil {
			return err
		}
		open = !only
	}
	if open {
		c.Size = p.size - c.Offset
	}
	p.layout.Data = Extent{c.Offset, c.Size}
	return nil
}

func (p *parser) otherChunk(c *Chunk) error {
	if p.fits(*c) {
		return nil
	}
	rest := p.size - c.Offset
	if p.dataAt == 0 {
		return malformed(c.Offset-headerBytes, "the chunk %q says %d bytes where %d are left, and the samples come after it; the file is cut short, copy it again", c.ID, c.Size, rest)
	}
	p.warn("byte %d: the chunk %q says %d bytes, the file ends after %d of them", c.Offset-headerBytes, c.ID, c.Size, rest)
	c.Size = rest
	return nil
}

// settle judges the file as a whole once the table is complete, and cuts the
// data to whole frames.
func (p *parser) settle() error {
	switch {
	case p.fmtAt == 0:
		return malformed(formBytes, "no fmt chunk, so nothing says how the samples are stored; export the recording again")
	case p.dataAt == 0:
		return malformed(p.size, "no data chunk: the file ends before any samples; record or copy it again")
	case p.dataAt < p.fmtAt:
		return malformed(p.fmtAt-headerBytes, "the fmt chunk stands after the data chunk at byte %d; export the recording again", p.dataAt-headerBytes)
	}
	d := &p.layout.Data
	is, frame := d.Size, int64(p.layout.Format.FrameBytes())
	d.Size -= d.Size % frame
	if d.Size == 0 {
		return malformed(p.dataAt-headerBytes, "the file holds no audio: its data chunk has %d bytes and a frame takes %d; record or copy it again", is, frame)
	}
	switch {
	case p.dataSaid != is:
		p.warn("byte %d: the data chunk says %d bytes, the file holds %d; the %d bytes to the last whole frame are used (%d frames)",
			p.dataAt-4, p.dataSaid, is, d.Size, d.Size/frame)
	case d.Size != is:
		p.warn("byte %d: the data chunk says %d bytes, no whole number of %d-byte frames; the first %d bytes are used (%d frames)",
			p.dataAt-4, is, frame, d.Size, d.Size/frame)
	}
	return nil
}
