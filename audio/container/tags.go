package container

import "fmt"

// Format tags that are read and written (RFC 2361; FFFEh from Microsoft 2001).
const (
	TagPCM        = 0x0001
	TagFloat      = 0x0003
	TagExtensible = 0xFFFE
)

// tagNames names the codings met in WAV files that are not linear. Numbers and
// names follow the registry in RFC 2361, appendix A, quoted from memory; those
// that were registered after it, from 0092h on, are common practice, no source.
var tagNames = map[uint16]string{
	0x0002: "Microsoft ADPCM",
	0x0004: "VSELP",
	0x0005: "CVSD",
	0x0006: "A-law",
	0x0007: "mu-law",
	0x0008: "DTS",
	0x0010: "OKI ADPCM",
	0x0011: "IMA ADPCM",
	0x0012: "MediaSpace ADPCM",
	0x0013: "Sierra ADPCM",
	0x0014: "G.723 ADPCM",
	0x0017: "Dialogic OKI ADPCM",
	0x0018: "MediaVision ADPCM",
	0x0020: "Yamaha ADPCM",
	0x0022: "TrueSpeech",
	0x0030: "AC-2",
	0x0031: "GSM 06.10",
	0x003B: "Rockwell ADPCM",
	0x0040: "G.721 ADPCM",
	0x0041: "G.728 CELP",
	0x0045: "G.726 ADPCM",
	0x0050: "MPEG layer 1 or 2",
	0x0055: "MPEG layer 3",
	0x0064: "G.726 ADPCM",
	0x0065: "G.722 ADPCM",
	0x0092: "AC-3 over S/PDIF",
	0x00FF: "AAC",
	0x0160: "Windows Media Audio 1",
	0x0161: "Windows Media Audio 2",
	0x0162: "Windows Media Audio Professional",
	0x0163: "Windows Media Audio Lossless",
	0x0200: "Creative ADPCM",
	0x0270: "ATRAC3",
	0x1600: "AAC in ADTS",
	0x1602: "AAC in LATM",
	0x1610: "HE-AAC",
	0x2000: "AC-3",
	0x2001: "DTS",
	0x674F: "Vorbis",
	0xF1AC: "FLAC",
}

func tagName(tag uint16) string {
	if name, known := tagNames[tag]; known {
		return fmt.Sprintf("%s (format tag %04Xh)", name, tag)
	}
	return fmt.Sprintf("format tag %04Xh", tag)
}

// guidTail is what follows the 16-bit tag in every sub-format GUID that stands
// for a format tag: xxxxxxxx-0000-0010-8000-00AA00389B71 as stored.
var guidTail = [14]byte{0, 0, 0, 0, 0x10, 0, 0x80, 0, 0, 0xAA, 0, 0x38, 0x9B, 0x71}

// subFormat builds the GUID of a format tag.
func subFormat(tag uint16) (guid [16]byte) {
	guid[0], guid[1] = byte(tag), byte(tag>>8)
	copy(guid[2:], guidTail[:])
	return guid
}

// guidTag is the inverse of subFormat; it fails for any other GUID.
func guidTag(guid [16]byte) (tag uint16, ok bool) {
	return uint16(guid[0]) | uint16(guid[1])<<8, [14]byte(guid[2:]) == guidTail
}

// guidText writes a GUID the usual way, with its first three fields as numbers.
func guidText(g [16]byte) string {
	return fmt.Sprintf("%02X%02X%02X%02X-%02X%02X-%02X%02X-%X-%X",
		g[3], g[2], g[1], g[0], g[5], g[4], g[7], g[6], g[8:10], g[10:])
}
