package container

import (
	"encoding/binary"
	"fmt"
	"math"
)

// maxRIFF is the largest file whose size the RIFF header can tell; FFFFFFFFh
// itself means unknown.
const maxRIFF = headerBytes + unknownSize - 1

// Pad is the number of bytes, 0 or 1, to be written after a payload of n bytes.
// [Header] has counted it.
func Pad(n int64) int { return int(n & 1) }

// Header returns all bytes of a WAV file that stand before the samples of
// `frames` frames: the RIFF header, fmt, fact (for every tag but PCM) and the
// head of the data chunk. Behind the samples the writer owes [Pad] bytes.
//
// fmtChunk, if not nil, is written as it is and must say the same as f does of
// coding, channels, rate, container and valid bits. Otherwise the plainest fmt
// that the standard allows is made: tag PCM with 16 bytes, or tag IEEE float
// with 18, where f has 1 or 2 channels and no channel mask and, if PCM, 8 or 16
// bits filling its container; EXTENSIBLE in all other cases. f.Tag and
// f.SubFormat are not looked at. Without a mask EXTENSIBLE mono is front
// centre, stereo front left and right, and more channels are unassigned.
//
// It fails if f cannot be written, if fmtChunk contradicts it, and if the file
// would exceed what 32-bit sizes can tell.
func Header(f Format, fmtChunk []byte, frames int64) ([]byte, error) {
	if err := checkWritable(f, frames); err != nil {
		return nil, err
	}
	if fmtChunk == nil {
		fmtChunk = makeFmt(f)
	} else if err := checkAgrees(f, fmtChunk); err != nil {
		return nil, err
	}
	le := binary.LittleEndian
	b := append([]byte("RIFF"), 0, 0, 0, 0)
	b = append(b, "WAVE"...)
	b = appendChunk(b, "fmt ", fmtChunk)
	if le.Uint16(fmtChunk) != TagPCM {
		b = appendChunk(b, "fact", le.AppendUint32(nil, uint32(frames)))
	}
	b = append(b, "data"...)
	data, err := dataSize(f, frames, int64(len(b))+4)
	if err != nil {
		return nil, err
	}
	b = le.AppendUint32(b, uint32(data))
	le.PutUint32(b[4:], uint32(int64(len(b))-headerBytes+data+int64(Pad(data))))
	return b, nil
}

func appendChunk(b []byte, id string, payload []byte) []byte {
	b = append(b, id...)
	b = binary.LittleEndian.AppendUint32(b, uint32(len(payload)))
	b = append(b, payload...)
	return append(b, make([]byte, Pad(int64(len(payload))))...)
}

// dataSize is the payload of the data chunk, checked against the 4 GiB that a
// RIFF file may have, of which `head` bytes stand before it.
func dataSize(f Format, frames, head int64) (int64, error) {
	frame := int64(f.FrameBytes())
	if most := (maxRIFF - head - 1) / frame; frames > most {
		return 0, fmt.Errorf("%d frames of %d bytes make a file of %.2f GiB, a WAV file holds at most 4 GiB (here %d frames): split the recording, or choose a format with fewer bytes a sample",
			frames, frame, float64(frames)*float64(frame)/(1<<30), most)
	}
	return frames * frame, nil
}

func checkWritable(f Format, frames int64) error {
	switch {
	case frames < 0:
		return fmt.Errorf("a WAV file of %d frames cannot be written; the length must be known", frames)
	case f.Channels < 1 || f.Channels > math.MaxUint16:
		return fmt.Errorf("%d channels cannot be written to WAV, only 1 to %d", f.Channels, math.MaxUint16)
	case f.Rate < 1 || int64(f.Rate) > math.MaxUint32:
		return fmt.Errorf("a rate of %d Hz cannot be written to WAV, only 1 to %d", f.Rate, uint32(math.MaxUint32))
	case f.Float && (f.Bytes != 4 && f.Bytes != 8 || f.ValidBits != 8*f.Bytes),
		!f.Float && (f.Bytes < 1 || f.Bytes > 4 || f.ValidBits < leastBits || f.ValidBits > 8*f.Bytes):
		return fmt.Errorf("samples of %d bits in %d bytes cannot be written to WAV, only PCM of %d to 32 bits and float of 32 and 64", f.ValidBits, f.Bytes, leastBits)
	case f.FrameBytes() > maxFrameBytes:
		return fmt.Errorf("%d channels of %d bytes cannot be written to WAV, a frame holds at most %d bytes: choose a smaller format or fewer channels", f.Channels, f.Bytes, maxFrameBytes)
	}
	return nil
}

// checkAgrees compares a given fmt chunk with the format it is to stand for.
func checkAgrees(f Format, raw []byte) error {
	if len(raw) < fmtPlain || len(raw) > fmtMax {
		return fmt.Errorf("a fmt chunk of %d bytes cannot be written", len(raw))
	}
	is, _, err := parseFormat(raw, 0)
	if err != nil {
		return fmt.Errorf("the fmt chunk to be kept: %w", err)
	}
	is.Tag, is.ChannelMask, is.SubFormat = f.Tag, f.ChannelMask, f.SubFormat
	if is != f {
		return fmt.Errorf("the fmt chunk to be kept says %+v, the samples are %+v: leave it out when the format changes", is, f)
	}
	return nil
}

// plain tells whether the standard allows a fmt chunk that is not EXTENSIBLE.
func (f Format) plain() bool {
	return f.Channels <= 2 && f.ChannelMask == 0 && (f.Float || f.ValidBits <= 16 && f.ValidBits == 8*f.Bytes)
}

func makeFmt(f Format) []byte {
	tag := uint16(TagPCM)
	if f.Float {
		tag = TagFloat
	}
	coding, plain := tag, f.plain()
	if !plain {
		tag = TagExtensible
	}
	le := binary.LittleEndian
	b := le.AppendUint16(nil, tag)
	b = le.AppendUint16(b, uint16(f.Channels))
	b = le.AppendUint32(b, uint32(f.Rate))
	b = le.AppendUint32(b, uint32(f.Rate*f.FrameBytes()))
	b = le.AppendUint16(b, uint16(f.FrameBytes()))
	b = le.AppendUint16(b, uint16(8*f.Bytes))
	switch {
	case !plain:
		return f.appendExtension(b, coding)
	case f.Float:
		return le.AppendUint16(b, 0)
	}
	return b
}

func (f Format) appendExtension(b []byte, coding uint16) []byte {
	le := binary.LittleEndian
	b = le.AppendUint16(b, fmtExtensible-fmtSized)
	b = le.AppendUint16(b, uint16(f.ValidBits))
	b = le.AppendUint32(b, f.mask())
	guid := subFormat(coding)
	return append(b, guid[:]...)
}

// Loudspeaker bits of the channel mask (Microsoft 2001).
const (
	frontLeft   = 1 << 0
	frontRight  = 1 << 1
	frontCentre = 1 << 2
)

func (f Format) mask() uint32 {
	switch {
	case f.ChannelMask != 0:
		return f.ChannelMask
	case f.Channels == 1:
		return frontCentre
	case f.Channels == 2:
		return frontLeft | frontRight
	}
	return 0
}
