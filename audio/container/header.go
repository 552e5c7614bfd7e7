package container

import (
	"bytes"
	"encoding/binary"
	"fmt"
	"math"
)

// maxData bounds the samples so that with other chunks the sum fits in 64 bits.
const maxData = math.MaxInt64 / 2

// Header returns all bytes that stand before the samples of a file without
// other chunks, as a [Plan] arranges them; fmtChunk may be nil. Behind the
// samples the writer owes [Pad] bytes.
func Header(f Format, fmtChunk []byte, frames int64) ([]byte, error) {
	o, err := Plan{Format: f, Fmt: fmtChunk, Frames: frames}.Outline()
	if err != nil {
		return nil, err
	}
	var b bytes.Buffer
	err = o.WriteHead(&b)
	return b.Bytes(), err
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
	case frames > maxData/int64(f.FrameBytes()):
		return fmt.Errorf("%d frames of %d bytes cannot be written to WAV, that is more than 64-bit sizes can tell", frames, f.FrameBytes())
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
