package container

import (
	"encoding/binary"
	"slices"
)

// fourCC stands among widths for four characters, which have no byte order.
const fourCC = -4

// swap reverses the numbers at the start of b, whose widths in bytes are given,
// as far as b goes, and returns what stands behind them.
func swap(b []byte, widths ...int) (rest []byte) {
	for _, w := range widths {
		n := max(w, -w)
		if len(b) < n {
			return nil
		}
		if w > 0 {
			slices.Reverse(b[:n])
		}
		b = b[n:]
	}
	return b
}

// swapFmt makes the payload of a big-endian fmt chunk, at least fmtPlain bytes
// long, little-endian. A GUID begins with numbers too, but some programs store
// it as in little-endian files.
func swapFmt(b []byte) {
	rest := swap(b, 2, 2, 4, 4, 2, 2, 2)
	if len(b) < fmtExtensible {
		return
	}
	guid := swap(rest, 2, 4)
	if _, ok := guidTag([16]byte(guid)); !ok {
		swap(guid, 4, 2, 2)
	}
}

// numbers are the widths of a chunk's fields: those of its head, one of which,
// at the offset `rows`, counts the rows behind it, and those of a row.
type numbers struct {
	head []int
	rows int
	row  []int
}

// chunkNumbers are those of the RIFF specification (1991) that count frames.
var chunkNumbers = map[string]numbers{
	"cue ": {[]int{4}, 0, []int{4, 4, fourCC, 4, 4, 4}},
	"plst": {[]int{4}, 0, []int{4, 4, 4}},
	"smpl": {[]int{4, 4, 4, 4, 4, 4, 4, 4, 4}, 28, []int{4, 4, 4, 4, 4, 4}},
}

// listNumbers are those at the start of the chunks in a LIST.
var listNumbers = map[string][]int{
	"labl": {4}, "note": {4}, "ltxt": {4, 4, fourCC, 2, 2, 2, 2}, "file": {4, 4},
}

// withoutNumbers have no number of more than a byte.
var withoutNumbers = map[string]bool{"iXML": true, "axml": true, "inst": true, "id3 ": true, "ID3 ": true}

// swappable tells whether a chunk has numbers and it is known where.
func swappable(label string) bool {
	_, known := chunkNumbers[label]
	return known || label == labelBext || label == labelInfo || label == labelMarks
}

// swapChunk makes the payload of a swappable chunk little-endian.
func swapChunk(label string, b []byte) {
	switch label {
	case labelBext:
		swapBext(b)
	case labelInfo, labelMarks:
		swapList(b[4:])
	default:
		chunkNumbers[label].swap(b)
	}
}

func (n numbers) swap(b []byte) {
	rest := swap(b, n.head...)
	if len(rest) == 0 {
		return
	}
	for range binary.LittleEndian.Uint32(b[n.rows:]) {
		if rest = swap(rest, n.row...); len(rest) == 0 {
			return
		}
	}
}

// swapList swaps the chunks behind the type of a LIST.
func swapList(b []byte) {
	for len(b) > headerBytes {
		payload := swap(b, fourCC, 4)
		size := min(int(binary.LittleEndian.Uint32(b[4:])), len(payload))
		swap(payload[:size], listNumbers[string(b[:4])]...)
		b = payload[min(size+size&1, len(payload)):]
	}
}
