package container

import (
	"bytes"
	"encoding/binary"
)

// Form is the kind of a WAV file: its first four bytes.
type Form string

const (
	RIFF Form = "RIFF" // sizes of 32 bits
	RIFX Form = "RIFX" // the same with big-endian numbers; read only
	RF64 Form = "RF64" // sizes of 64 bits in a ds64 chunk (EBU Tech 3306)
	BW64 Form = "BW64" // the same, made for axml and chna (ITU-R BS.2088)
)

// long tells whether sizes may have 64 bits.
func (f Form) long() bool { return f == RF64 || f == BW64 }

func (f Form) order() binary.ByteOrder {
	if f == RIFX {
		return binary.BigEndian
	}
	return binary.LittleEndian
}

// foreignForms names what a file is when its first bytes are not a WAV file's.
var foreignForms = []struct{ magic, name string }{
	{"FORM", "an IFF file, most likely AIFF"},
	{"fLaC", "a FLAC file"},
	{"OggS", "an Ogg file"},
	{"caff", "a CAF file"},
	{"ID3", "an MPEG audio file"},
	{"riff", "a Wave64 file"},
}

// parseForm looks at the first bytes of a file, of which there is at least one.
func parseForm(b []byte) (Form, error) {
	switch f := Form(b[:min(4, len(b))]); f {
	case RIFF, RIFX, RF64, BW64:
		return f, nil
	}
	for _, f := range foreignForms {
		if bytes.HasPrefix(b, []byte(f.magic)) {
			return "", malformed(0, "not a WAV file but %s; convert it to WAV first", f.name)
		}
	}
	return "", malformed(0, "not a WAV file: it begins with %q, not \"RIFF\"; give a WAV recording", b[:min(4, len(b))])
}
