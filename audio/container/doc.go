// Package container reads and writes the outside of a WAV file: where its
// chunks are, what its fmt chunk says, and where its samples begin and end. It
// never touches a sample.
//
// # Vocabulary
//
// A RIFF file is a 12-byte form header (the id "RIFF", a 32-bit size, the form
// type "WAVE") and a row of chunks. A chunk is a 4-byte id, a 32-bit size and
// that many bytes of payload; after an odd payload stands one pad byte that the
// chunk's own size does not count. All numbers are little-endian.
//
// The fmt chunk describes the samples, the data chunk holds them, and fact
// repeats the number of frames for every format tag but plain PCM. A frame is
// one sample of every channel. A sample stands in a container of whole bytes;
// its valid bits are left-justified there, so 20-bit samples may stand in 3
// bytes. An EXTENSIBLE fmt chunk (tag FFFEh) is 40 bytes long and adds the
// valid bits, a channel mask (which loudspeaker a channel is meant for) and a
// sub-format, a 16-byte GUID that plays the part of the tag.
//
// # Trust
//
// Headers lie: recorders crash, programs that write to a pipe do not know the
// length, other programs forget the pad byte. [Parse] believes a size only as
// far as the file goes, says in [Layout.Warnings] what it had to correct, and
// refuses with an [Error] what it cannot make sense of. It allocates nothing
// that depends on a size read from the file.
//
// Sources: Multimedia Programming Interface and Data Specifications 1.0 (IBM
// and Microsoft, 1991) for RIFF and WAVE; Multiple Channel Audio Data and WAVE
// Files (Microsoft, 2001) for EXTENSIBLE; RFC 2361 (1998) for format tags.
package container
