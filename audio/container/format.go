package container

import (
	"encoding/binary"
	"fmt"
	"math/bits"
)

// Sizes of the three kinds of fmt chunk, and a bound on what is kept of one.
const (
	fmtPlain      = 16
	fmtSized      = 18 // with an extension size, 0
	fmtExtensible = 40
	fmtMax        = 1024
)

// leastBits is the least number of valid bits of a PCM sample that is read:
// fewer occur only in damaged headers.
const leastBits = 4

// maxFrameBytes is what the 16-bit block-align field can express.
const maxFrameBytes = 1<<16 - 1

// Format is what a fmt chunk says of the samples.
type Format struct {
	Tag         uint16   // as stored: TagPCM, TagFloat or TagExtensible
	Float       bool     // IEEE float samples; otherwise linear PCM
	Channels    int      // 1 to 65535
	Rate        int      // Hz, 1 to 2^32-1
	Bytes       int      // container bytes a sample: PCM 1 to 4, float 4 or 8
	ValidBits   int      // PCM 4 to 8*Bytes; float 8*Bytes
	ChannelMask uint32   // EXTENSIBLE only; 0: no loudspeaker assigned
	SubFormat   [16]byte // EXTENSIBLE only: the GUID as stored
}

// FrameBytes is the size of one sample of every channel.
func (f Format) FrameBytes() int { return f.Channels * f.Bytes }

// parseFormat reads the payload of a fmt chunk that begins at byte `at`.
func parseFormat(raw []byte, at int64) (f Format, warnings []string, err error) {
	le := binary.LittleEndian
	f.Tag = le.Uint16(raw)
	f.Channels = int(le.Uint16(raw[2:]))
	f.Rate = int(le.Uint32(raw[4:]))
	width := int(le.Uint16(raw[14:]))
	if err := checkCounts(f, width, at); err != nil {
		return f, nil, err
	}
	f.Bytes = (width + 7) / 8
	f.ValidBits = width
	coding := f.Tag
	if f.Tag == TagExtensible {
		if coding, warnings, err = f.extension(raw, width, at); err != nil {
			return f, nil, err
		}
	}
	if err := f.setCoding(coding, at); err != nil {
		return f, nil, err
	}
	if err := f.checkAlign(int(le.Uint16(raw[12:])), at); err != nil {
		return f, nil, err
	}
	if got, want := le.Uint32(raw[8:]), uint32(f.Rate*f.FrameBytes()); got != want {
		warnings = append(warnings, fmt.Sprintf("byte %d: fmt says %d bytes a second where its other fields make %d; ignored", at+8, got, want))
	}
	return f, warnings, nil
}

func checkCounts(f Format, width int, at int64) error {
	const repair = "repair the header or export the recording again"
	switch {
	case f.Channels == 0:
		return malformed(at+2, "fmt says 0 channels; %s", repair)
	case f.Rate == 0:
		return malformed(at+4, "fmt says a sample rate of 0 Hz; %s", repair)
	case width == 0 && (f.Tag == TagPCM || f.Tag == TagFloat || f.Tag == TagExtensible):
		return malformed(at+14, "fmt says 0 bits a sample; %s", repair)
	}
	return nil
}

// extension reads what EXTENSIBLE adds and returns the tag that the sub-format
// stands for.
func (f *Format) extension(raw []byte, width int, at int64) (coding uint16, warnings []string, err error) {
	if len(raw) < fmtExtensible {
		return 0, nil, malformed(at, "fmt is EXTENSIBLE but only %d bytes long, %d are needed; export the recording again", len(raw), fmtExtensible)
	}
	if width%8 != 0 {
		return 0, nil, malformed(at+14, "fmt is EXTENSIBLE with a container of %d bits, which is no whole number of bytes; export the recording again", width)
	}
	le := binary.LittleEndian
	f.ValidBits = int(le.Uint16(raw[18:]))
	f.ChannelMask = le.Uint32(raw[20:])
	f.SubFormat = [16]byte(raw[24:40])
	coding, ok := guidTag(f.SubFormat)
	if !ok {
		return 0, nil, unsupported(at+24, "the sub-format %s is neither PCM nor IEEE float; convert the recording to PCM or float WAV", guidText(f.SubFormat))
	}
	if f.ValidBits == 0 || f.ValidBits > width || coding == TagFloat && f.ValidBits != width {
		warnings = append(warnings, fmt.Sprintf("byte %d: fmt says %d valid bits in a container of %d; all %d are used", at+18, f.ValidBits, width, width))
		f.ValidBits = width
	}
	if n := bits.OnesCount32(f.ChannelMask); n != 0 && n != f.Channels {
		warnings = append(warnings, fmt.Sprintf("byte %d: the channel mask %Xh names %d loudspeakers for %d channels; kept as it is", at+20, f.ChannelMask, n, f.Channels))
	}
	return coding, warnings, nil
}

// setCoding settles PCM or float and refuses widths that are not read.
func (f *Format) setCoding(coding uint16, at int64) error {
	switch coding {
	case TagPCM:
		if f.Bytes > 4 || f.ValidBits < leastBits {
			return unsupported(at+14, "PCM with %d bits in a container of %d bytes is not read, only %d to 32 bits in 1 to 4 bytes; convert the recording", f.ValidBits, f.Bytes, leastBits)
		}
	case TagFloat:
		if f.ValidBits != 32 && f.ValidBits != 64 {
			return unsupported(at+14, "IEEE float with %d bits is not read, only 32 and 64; convert the recording", f.ValidBits)
		}
		f.Float = true
	default:
		return unsupported(at, "the samples are coded as %s, not as PCM or IEEE float; convert the recording to PCM or float WAV", tagName(coding))
	}
	return nil
}

func (f *Format) checkAlign(align int, at int64) error {
	if align != f.FrameBytes() {
		return malformed(at+12, "fmt says %d bytes a frame, but %d channels of %d bytes make %d; repair the header or export the recording again", align, f.Channels, f.Bytes, f.FrameBytes())
	}
	return nil
}
