// Package container reads and writes the outside of a WAV file: where its
// chunks are, what its fmt chunk says, and where its samples begin and end. It
// never touches a sample.
//
// # Vocabulary
//
// A RIFF file is a 12-byte form header (the id "RIFF", a 32-bit size, the form
// type "WAVE") and a row of chunks. A chunk is a 4-byte id, a 32-bit size and
// that many bytes of payload; after an odd payload stands one pad byte that the
// chunk's own size does not count. All numbers are little-endian; in a file
// whose id is "RIFX" they are big-endian.
//
// RF64 and BW64 are the same for files over 4 GiB: where a 32-bit size says
// FFFFFFFFh, the chunk ds64, which comes first, has one of 64 bits. RIFF files
// are written with a JUNK chunk in its place, so that they can be turned into
// RF64 when something makes them longer.
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
// # What other chunks tell
//
// The rest of the chunks describe the recording: bext (who, when, how it was
// coded), iXML, axml and chna (scenes, programmes, objects), cue, plst, smpl and
// LIST/adtl (places in it), LIST/INFO, PEAK and levl (how loud it is). [Carry]
// keeps what is still true of a treated recording, corrects what it can, drops
// the rest, and tells which; an [Outline] writes them around the samples.
//
// Sources: Multimedia Programming Interface and Data Specifications 1.0 (IBM
// and Microsoft, 1991) for RIFF and WAVE; Multiple Channel Audio Data and WAVE
// Files (Microsoft, 2001) for EXTENSIBLE; RFC 2361 (1998) for format tags; EBU
// Tech 3285 v2 (2011) for bext, its supplement 3 (2001) for levl; EBU R 98 (1999)
// for the coding history; EBU Tech 3306 v2 (2018) for RF64; ITU-R BS.2088-2 for
// BW64, axml and chna.
package container
