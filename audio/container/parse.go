package container

import (
	"bytes"
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

// Parse walks the chunks of a WAV file of `size` bytes, of any [Form], and
// returns where they are. Every size in the file is checked against the file;
// what can be put right is put right with a warning:
//
//   - a data size that is unknown (FFFFFFFFh), or that reaches beyond the end,
//     stands for all whole frames up to the end; so does a data size of 0 that
//     something other than chunks follows,
//   - bytes after the last whole frame, and bytes after the data that are no
//     chunk, are left out,
//   - a missing pad byte, a wrong size in the form header, a wrong byte rate,
//   - an RF64 or BW64 file without its ds64 chunk, whose sizes are then unknown.
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
	long   *longSizes // nil while there are none
	// Offsets of the payloads, 0 while not found, and sizes as stored.
	fmtAt, dataAt      int64
	formSaid, dataSaid int64
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
	form, err := parseForm(b)
	if err != nil {
		return err
	}
	if p.size < formBytes {
		return malformed(p.size, "the file ends inside the %d-byte %s header; record or copy it again", formBytes, form)
	}
	if kind := b[8:]; !bytes.Equal(kind, []byte("WAVE")) {
		return malformed(8, "a %s file of type %q, not WAVE; only WAV recordings are read", form, kind)
	}
	p.layout.Form, p.formSaid = form, int64(form.order().Uint32(b[4:]))
	if form == RIFX {
		p.warn("byte 0: a big-endian file (RIFX); an output of it is little-endian (RIFF)")
	}
	if !form.long() || p.formSaid != unknownSize {
		p.checkFormSize(4, p.formSaid)
	}
	return nil
}

// checkFormSize compares the size of the form, as stored at byte `at`, with the
// file. A last pad byte is counted by some programs and not by others.
func (p *parser) checkFormSize(at, said int64) {
	if is := p.size - headerBytes; said != is && said+said&1 != is {
		p.warn("byte %d: the header says %d bytes follow, the file has %d; ignored", at, said, is)
	}
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
	case "ds64":
		err = p.ds64Chunk(&c)
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
	if !printable(b[:4]) {
		return c, false, nil
	}
	c = Chunk{ID: string(b[:4]), Offset: pos + headerBytes, Size: int64(p.layout.Form.order().Uint32(b[4:]))}
	if c.Size == unknownSize {
		c.Size = p.long.of(c.ID)
	}
	return c, true, nil
}

// printable tells whether an id is ASCII that can be seen, or blanks.
func printable(id []byte) bool {
	for _, c := range id {
		if c < ' ' || c > '~' {
			return false
		}
	}
	return true
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
	if p.layout.Form == RIFX {
		swapFmt(raw)
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
	open := c.Size == unknownSize && p.long == nil || !p.fits(*c)
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
	c.Size, c.Cut = rest, true
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
	if p.layout.Form.long() && p.long == nil {
		p.warn("byte %d: no ds64 chunk, so this %s file does not tell its sizes", formBytes, p.layout.Form)
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
