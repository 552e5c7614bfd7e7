package container

import (
	"fmt"
	"io"
	"strings"
)

// maxEdited bounds the chunks that are corrected, which is done in memory; those
// met in practice are a thousandth of it. Others are copied in pieces.
const maxEdited = 1 << 24

// Carry decides what of the chunks of a file that [Parse] has laid out is still
// true after a change, and corrects what can be:
//
//   - bext: a row is added to the coding history; if samples have changed, the
//     loudness fields of version 2 are set to 'not stated'; for a stretch the
//     time reference moves with its first frame,
//   - PEAK, levl and digests are dropped if samples or their encoding have changed,
//   - markers, loops and whatever else tells times are kept as long as time does
//     not move, and dropped for a stretch,
//   - padding is dropped,
//   - of a RIFX file the numbers are made little-endian where they are known,
//   - everything else is kept byte for byte.
//
// What is corrected, at most 16 MiB a chunk, is held in memory. Errors are those
// of reading. It panics unless the frames of the Change lie within the recording.
func Carry(r io.ReaderAt, l *Layout, c Change) (*Carriage, error) {
	if c.From < 0 || c.Frames < 1 || c.Frames > l.Frames()-c.From {
		panic(fmt.Sprintf("container: %d frames from frame %d on do not lie within the %d of a recording", c.Frames, c.From, l.Frames()))
	}
	was, is := l.Format, c.Format
	k := &carrier{Change: c, from: r, layout: l, stretch: c.Frames != l.Frames()}
	k.changed = c.Samples || k.stretch || was.Float != is.Float || was.Bytes != is.Bytes || was.ValidBits != is.ValidBits
	k.out = Carriage{Kept: []Note{}, Corrected: []Note{}, Dropped: []Note{}, bw64: l.Form == BW64}
	k.list = &k.out.head
	for i, chunk := range l.Chunks {
		if err := k.chunk(i, chunk); err != nil {
			return nil, err
		}
	}
	return &k.out, nil
}

type carrier struct {
	Change
	from             io.ReaderAt
	layout           *Layout
	changed, stretch bool
	out              Carriage
	list             *[]part // head, then tail
}

// chunk deals with the i-th chunk.
func (k *carrier) chunk(i int, c Chunk) error {
	switch {
	case c.ID == "fmt ", c.ID == "fact" && k.list == &k.out.head:
		*k.list = append(*k.list, part{id: c.ID})
	case c.ID == "fact": // after the data it is of no use
	case c.Offset == k.layout.Data.Offset:
		k.list = &k.out.tail
	case c.ID == "data":
		k.drop(c.ID, "only the first data chunk is the recording")
	case padding[c.ID]:
		if i > 0 {
			k.drop(c.ID, "padding")
		}
	default:
		return k.content(c)
	}
	return nil
}

func (k *carrier) drop(label, why string) { k.out.Dropped = append(k.out.Dropped, Note{label, why}) }

// content deals with a chunk that holds something.
func (k *carrier) content(c Chunk) error {
	label, err := k.label(c)
	if err != nil {
		return err
	}
	t := truths[label]
	switch {
	case t.samples != "" && (k.changed || k.layout.Form == RIFX): // whose bytes change
		k.drop(label, t.samples)
		return nil
	case t.time != "" && k.stretch:
		k.drop(label, t.time)
		return nil
	case c.isShortBext():
		k.shortBext(c)
		return nil
	case label == labelBext || k.layout.Form == RIFX && swappable(label):
		return k.edit(c, label)
	}
	k.out.chna = k.out.chna || label == labelChna
	k.add(part{c.ID, k.from, c.Offset, c.Size}, label, c.corrections(), k.notes(label))
	return nil
}

// isShortBext tells a bext chunk in which fields are missing.
func (c Chunk) isShortBext() bool { return c.ID == labelBext && c.Size < bextHistory }

// shortBext keeps a bext chunk as it is, unless it may tell a time that is false.
func (k *carrier) shortBext(c Chunk) {
	why := fmt.Sprintf("%d bytes are too few for its fields", c.Size)
	if k.stretch {
		k.drop(c.ID, why)
	} else {
		k.add(part{c.ID, k.from, c.Offset, c.Size}, c.ID, c.corrections(), []string{why + ", not corrected"})
	}
}

// label names a chunk.
func (k *carrier) label(c Chunk) (string, error) {
	if c.ID != "LIST" || c.Size < 4 {
		return c.ID, nil
	}
	var b [4]byte
	if n, err := k.from.ReadAt(b[:], c.Offset); n < len(b) {
		return "", err
	}
	if !printable(b[:]) {
		return c.ID, nil
	}
	return c.ID + "/" + string(b[:]), nil
}

// corrections says what is corrected in any chunk.
func (c Chunk) corrections() []string {
	if c.Cut {
		return []string{"the original ends inside it, its size now says so"}
	}
	return nil
}

// notes says what of a chunk may be false in the output.
func (k *carrier) notes(label string) (notes []string) {
	if t := truths[label]; k.changed && t.note != "" {
		notes = append(notes, t.note)
	}
	if k.layout.Form == RIFX && !swappable(label) && !withoutNumbers[label] {
		notes = append(notes, "numbers in it, if any, are big-endian")
	}
	return notes
}

// add takes a chunk into the output.
func (k *carrier) add(p part, label string, corrections, notes []string) {
	*k.list = append(*k.list, p)
	list := &k.out.Kept
	if len(corrections) > 0 {
		list = &k.out.Corrected
	}
	*list = append(*list, Note{label, strings.Join(append(corrections, notes...), "; ")})
}

// edit reads a chunk and takes it in as it must be now.
func (k *carrier) edit(c Chunk, label string) error {
	if c.Size > maxEdited {
		k.drop(label, fmt.Sprintf("%d bytes are more than can be corrected", c.Size))
		return nil
	}
	b := make([]byte, c.Size)
	if n, err := k.from.ReadAt(b, c.Offset); n < len(b) {
		return err
	}
	corrections, notes := c.corrections(), k.notes(label)
	if k.layout.Form == RIFX {
		swapChunk(label, b)
		corrections = append(corrections, "numbers made little-endian")
	}
	if label == labelBext {
		var did, more []string
		b, did, more = k.correctBext(b, k.changed)
		corrections, notes = append(corrections, did...), append(notes, more...)
	}
	k.add(inMemory(c.ID, b), label, corrections, notes)
	return nil
}
