package main

import (
	"bytes"
	"encoding/binary"
	"fmt"
	"strings"
	"testing"

	"fettle/audio"
)

// chunk is one of a RIFF file, padded to an even length.
func chunk(id, payload string) []byte {
	out := append(u32([]byte(id), len(payload)), payload...)
	return append(out, make([]byte, len(payload)%2)...)
}

// withChunks puts chunks before and after the data of a plain file.
func withChunks(file []byte, before, after []byte) []byte {
	out := append([]byte(nil), file[:36]...)
	out = append(append(out, before...), file[36:]...)
	out = append(out, after...)
	binary.LittleEndian.PutUint32(out[4:], uint32(len(out)-8))
	return out
}

// bext is a broadcast extension of version 2 (EBU Tech 3285, 2011): its time
// reference, its loudness and its coding history.
func bext(time uint64, loudness int, history string) string {
	b := make([]byte, 602)
	copy(b, "Brackwater crossing")
	binary.LittleEndian.PutUint64(b[338:], time)
	binary.LittleEndian.PutUint16(b[346:], 2)
	for at := 412; at < 422; at += 2 {
		binary.LittleEndian.PutUint16(b[at:], uint16(loudness))
	}
	return string(b) + history
}

const (
	ixml    = "<BWFXML><SCENE>12</SCENE></BWFXML>"
	cue     = "\x01\x00\x00\x00\x01\x00\x00\x00\x10\x00\x00\x00data\x00\x00\x00\x00\x00\x00\x00\x00\x10\x00\x00\x00"
	history = "A=PCM,F=8000,W=16,M=mono,T=recorder\r\n"
)

func carried() []byte {
	plain := wav{tag: tagPCM, channels: 1, rate: rate, bits: 16, data: make([]byte, 2*101)}.bytes()
	before := append(chunk("bext", bext(123456, -2300, history)), chunk("xyzw", "unknown, odd.")...)
	after := append(chunk("iXML", ixml), append(chunk("cue ", cue), chunk("MD5 ", strings.Repeat("d", 16))...)...)
	return withChunks(plain, before, after)
}

// payload is that of a chunk of an output.
func (b *bench) payload(rel, id string) string {
	b.t.Helper()
	r, err := audio.Open(b.path("out/" + rel))
	mustDo(b.t, err)
	defer r.Close()
	for _, c := range r.Layout().Chunks {
		if c.ID == id {
			return string(b.output(rel)[c.Offset:][:c.Size])
		}
	}
	return "no such chunk"
}

// TestChunksSurvive: what stays true goes over byte for byte and in order, what
// the treatment makes false is corrected or dropped, and the record says which.
func TestChunksSurvive(t *testing.T) {
	b := newBench(t)
	b.file("in/a.wav", carried())
	b.render(filterChain, b.path("in")).must(t, exitDone)
	for id, want := range map[string]string{"iXML": ixml, "cue ": cue, "xyzw": "unknown, odd.", "MD5 ": "no such chunk"} {
		mustEqual(t, id, b.payload("a.wav", id), want)
	}
	out := b.payload("a.wav", "bext")
	mustEqual(t, "time reference", binary.LittleEndian.Uint64([]byte(out[338:])), uint64(123456))
	mustEqual(t, "what stands before the loudness", out[:412], bext(123456, 0, "")[:412])
	for at := 412; at < 422; at += 2 {
		mustEqual(t, "loudness not stated", binary.LittleEndian.Uint16([]byte(out[at:])), uint16(0x7FFF))
	}
	rows := strings.Split(strings.TrimRight(out[602:], "\x00"), "\r\n")
	if len(rows) != 3 || rows[0]+"\r\n" != history || rows[2] != "" {
		t.Fatalf("coding history %q, want the old row and a new one", rows)
	}
	mustEqual(t, "new row", fmt.Sprint(codingHistory(t, rows[1])), fmt.Sprint(map[string]string{
		"A": "PCM", "F": "8000", "W": "16", "M": "mono", "T": codingHistory(t, rows[1])["T"],
	}))
	for _, word := range []string{"fettle", "chain", b.last()["chain_sha256"].(string)[:8], "TPDF"} {
		if !strings.Contains(codingHistory(t, rows[1])["T"], word) {
			t.Errorf("coding history %q does not say %q", rows[1], word)
		}
	}
	mustEqual(t, "kept", chunksIn(b.last(), "chunks_kept"), "xyzw iXML cue ")
	mustEqual(t, "corrected", chunksIn(b.last(), "chunks_corrected"), "bext")
	mustEqual(t, "dropped", chunksIn(b.last(), "chunks_dropped"), "MD5 ")
	if i, j := bytes.Index(b.output("a.wav"), []byte("iXML")), bytes.Index(b.output("a.wav"), []byte("cue ")); i > j {
		t.Error("the chunks are not in order")
	}
}

// codingHistory parses a row (EBU R 98, 1999): letters with values, parted by
// commas; the free text after T= comes last.
func codingHistory(t *testing.T, row string) map[string]string {
	t.Helper()
	out := map[string]string{}
	for row != "" {
		key, rest, ok := strings.Cut(row, "=")
		if !ok {
			t.Fatalf("row %q: no =", row)
		}
		if key == "T" {
			out[key] = rest
			break
		}
		out[key], row, _ = strings.Cut(rest, ",")
	}
	return out
}

func chunksIn(entry map[string]any, key string) string {
	var ids []string
	for _, n := range entry[key].([]any) {
		ids = append(ids, n.(map[string]any)["chunk"].(string))
	}
	return strings.Join(ids, " ")
}

// TestChunksOfATrial: what tells times is false of a stretch.
func TestChunksOfATrial(t *testing.T) {
	b := newBench(t)
	b.file("in/a.wav", carried())
	b.render(filterChain, "--from", "0.005", b.path("in")).must(t, exitDone)
	out := b.payload("a.trial.wav", "bext")
	mustEqual(t, "time reference", binary.LittleEndian.Uint64([]byte(out[338:])), uint64(123456+40))
	mustEqual(t, "cue", b.payload("a.trial.wav", "cue "), "no such chunk")
	mustEqual(t, "unknown", b.payload("a.trial.wav", "xyzw"), "unknown, odd.")
}
