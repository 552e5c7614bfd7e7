package container

import (
	"bytes"
	"encoding/binary"
	"fmt"
	"strings"
)

// Places of fields in the payload of bext (EBU Tech 3285 v2, 2011, 2.3).
const (
	bextTime     = 338 // first frame, counted from midnight; 64 bits
	bextVersion  = 346
	bextUMID     = 348 // from version 1 on, 64 bytes
	bextLoudness = 412 // from version 2 on, 5 numbers of 16 bits
	bextReserved = 422
	bextHistory  = 602 // to the end
)

// notStated is what a loudness field holds whose value is not known.
const notStated = 0x7FFF

func swapBext(b []byte) {
	if len(b) >= bextHistory {
		swap(b[bextTime:], 4, 4, 2)
		swap(b[bextLoudness:], 2, 2, 2, 2, 2)
	}
}

// correctBext makes a bext chunk of at least bextHistory bytes tell of the
// output, and says what it did and what stays that may be false.
func (c Change) correctBext(b []byte, changed bool) (out []byte, did, notes []string) {
	le := binary.LittleEndian
	version := le.Uint16(b[bextVersion:])
	if c.From != 0 {
		le.PutUint64(b[bextTime:], le.Uint64(b[bextTime:])+uint64(c.From))
		did = append(did, fmt.Sprintf("time reference moved by %d frames", c.From))
	}
	if changed && version >= 2 {
		for at := bextLoudness; at < bextReserved; at += 2 {
			le.PutUint16(b[at:], notStated)
		}
		did = append(did, "loudness not stated any more")
	}
	if c.Text != "" {
		b = append(b[:bextHistory:bextHistory], extendHistory(b[bextHistory:], codingRow(c.Format, c.Text))...)
		did = append(did, "coding history extended")
	}
	if changed && version >= 1 && !bytes.Equal(b[bextUMID:bextLoudness], make([]byte, bextLoudness-bextUMID)) {
		notes = []string{"its UMID is the original's"}
	}
	return b, did, notes
}

// extendHistory puts a row behind those of a coding history. Zeros that fill
// its end are left out; readers stop at the first, so the row stands before it.
func extendHistory(history []byte, row string) []byte {
	rows, rest, _ := bytes.Cut(history, []byte{0})
	out := bytes.Clone(rows)
	switch {
	case len(rows) == 0 || bytes.HasSuffix(rows, []byte("\n")):
	case bytes.HasSuffix(rows, []byte("\r")):
		out = append(out, '\n')
	default:
		out = append(out, "\r\n"...)
	}
	out = append(out, row...)
	if rest = bytes.TrimRight(rest, "\x00"); len(rest) > 0 {
		out = append(append(out, 0), rest...)
	}
	return out
}

// codingRow is a row of a coding history (EBU R 98, 1999): how the samples are
// coded now, and as free text what was done. The standard has no word for float,
// which the text begins with then, nor for more than two channels.
func codingRow(f Format, text string) string {
	row := fmt.Sprintf("A=PCM,F=%d,W=%d,", f.Rate, f.ValidBits)
	switch f.Channels {
	case 1:
		row += "M=mono,"
	case 2:
		row += "M=stereo,"
	}
	if f.Float {
		text = "IEEE float; " + text
	}
	return row + "T=" + strings.Map(rowRune, text) + "\r\n"
}

// rowRune replaces what may not stand in the free text of a row, which is ASCII
// and in which commas would end the field.
func rowRune(r rune) rune {
	switch {
	case r == ',':
		return ';'
	case r < ' ':
		return ' '
	case r > '~':
		return '?'
	}
	return r
}
