package main

import (
	"encoding/hex"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"time"

	"fettle/cmd/fettle/internal/batch"
	"fettle/filter/stream/machine"
)

// contract is every key that the record's readers may count on.
var contract = []string{
	"schema", "input", "output", "sha256_in", "sha256_out", "rate_hz", "channels", "frames", "chain_sha256", "phase",
	"latency_samples", "residual_samples", "peak_in_dbfs", "peak_out_dbfs", "true_peak_out_dbtp", "dither", "edges",
	"kernel", "version", "status", "warnings", "error",
}

// TestRecord: all keys are there, of failed recordings too, and what they say
// agrees with the files.
func TestRecord(t *testing.T) {
	b := newBench(t)
	in := b.recording("in/a.wav", "pcm24", rate, 2, noise(2*500, 1))
	b.file("in/bad.wav", []byte("no sound"))
	taken := hash(t, in)
	const text = "phase: linear\nedges: mirror\nstages:\n  - fir: {taps: [0.25, 0.5, 0.25]}\n"
	b.render(text, "--jobs", "1", b.path("in")).must(t, exitSomeFailed, "bad.wav")
	entries := b.record()
	mustEqual(t, "entries", len(entries), 2)
	for _, entry := range entries {
		for _, key := range contract {
			if _, ok := entry[key]; !ok {
				t.Errorf("%v: no key %s", entry["output"], key)
			}
		}
	}
	done := entries[0]
	for key, want := range map[string]any{
		"schema": "fettle.treatment/1", "status": "done", "error": "", "input": in, "output": "a.wav",
		"sha256_in": taken, "sha256_out": hash(t, filepath.Join(b.Out, "a.wav")),
		"rate_hz": float64(rate), "channels": 2.0, "frames": 500.0, "phase": "linear", "edges": "mirror",
		// A symmetric kernel of 3 taps is late by exactly one sample.
		"latency_samples": 1.0, "residual_samples": 0.0, "dither": "TPDF", "kernel": machine.Best().String(),
		"format_in": "24-bit PCM", "format_out": "24-bit PCM", "version": version(),
	} {
		mustEqual(t, key, done[key], want)
	}
	if raw, err := hex.DecodeString(done["chain_sha256"].(string)); err != nil || len(raw) != 32 {
		t.Errorf("chain_sha256 %v", done["chain_sha256"])
	}
	mustEqual(t, "status", entries[1]["status"], any("failed"))
	mustEqual(t, "peak of a failed recording", entries[1]["peak_out_dbfs"], nil)
}

// TestOriginalsAreUntouched in bytes and in time of change.
func TestOriginalsAreUntouched(t *testing.T) {
	b := newBench(t)
	in := b.plain("in/a.wav")
	old := time.Date(2003, 4, 5, 6, 7, 8, 0, time.UTC)
	mustDo(t, os.Chtimes(in, old, old), os.Chmod(in, 0o444))
	before := hash(t, in)
	b.render(filterChain, b.path("in")).must(t, exitDone)
	info, err := os.Stat(in)
	mustDo(t, err)
	mustEqual(t, "hash", hash(t, in), before)
	mustEqual(t, "mode", info.Mode().Perm(), 0o444)
	if !info.ModTime().Equal(old) {
		t.Errorf("changed %v, want %v", info.ModTime(), old)
	}
}

// TestResume: what is done is not done again, unless something that it depends
// on has changed.
func TestResume(t *testing.T) {
	tests := []struct {
		name   string
		change func(b *bench)
		chain  string
		args   []string
		redone []string
	}{
		{name: "nothing"},
		{name: "touched input", redone: []string{"a.wav"}, change: func(b *bench) {
			now := time.Now().Add(time.Hour)
			mustDo(b.t, os.Chtimes(b.path("in/a.wav"), now, now))
		}},
		{name: "new input", redone: []string{"c.wav"}, change: func(b *bench) { b.plain("in/c.wav") }},
		{name: "deleted output", redone: []string{"b.wav"}, change: func(b *bench) { mustDo(b.t, os.Remove(filepath.Join(b.Out, "b.wav"))) }},
		{name: "shortened output", redone: []string{"b.wav"}, change: func(b *bench) { mustDo(b.t, os.Truncate(filepath.Join(b.Out, "b.wav"), 100)) }},
		{name: "another folder with the same names", redone: []string{"a.wav", "b.wav"}, change: func(b *bench) {
			mustDo(b.t, os.Rename(b.path("in"), b.path("was")), os.Mkdir(b.path("in"), 0o777), os.Rename(b.path("was"), b.path("in/x")))
		}, args: []string{"IN/x"}},
		{name: "torn last line", redone: []string{"b.wav"}, change: func(b *bench) { b.tear(30) }},
		{name: "line without its end", redone: []string{"b.wav"}, change: func(b *bench) { b.tear(1) }},
		{name: "chain", redone: []string{"a.wav", "b.wav"}, chain: "stages:\n  - highpass: {at: 101 Hz, order: 2}\n"},
		{name: "phase", redone: []string{"a.wav", "b.wav"}, args: []string{"--phase", "minimum"}},
		{name: "format", redone: []string{"a.wav", "b.wav"}, args: []string{"--format", "pcm24"}},
		{name: "headroom", redone: []string{"a.wav", "b.wav"}, args: []string{"--headroom", "1 dB"}},
		{name: "fit", redone: []string{"a.wav", "b.wav"}, args: []string{"--headroom", "fit"}},
		{name: "again", redone: []string{"a.wav", "b.wav"}, args: []string{"--again"}},
		{name: "jobs", args: []string{"--jobs", "3"}},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			b := newBench(t)
			b.plain("in/a.wav")
			b.plain("in/b.wav")
			b.render(filterChain, "--jobs", "1", b.path("in")).must(t, exitDone)
			before := len(b.record())
			if test.change != nil {
				test.change(b)
			}
			chain, args := filterChain, []string{b.path("in")}
			if test.chain != "" {
				chain = test.chain
			}
			for _, arg := range test.args {
				if rest, ok := strings.CutPrefix(arg, "IN/"); ok {
					args[0] = b.path("in/" + rest)
					continue
				}
				args = append(args, arg)
			}
			b.render(chain, args...).must(t, exitDone)
			if test.redone == nil {
				mustEqual(t, "lines in the record", len(b.record()), before)
				return
			}
			b.mustHaveRedone(test.redone)
		})
	}
}

// tear cuts bytes off the record's end, as a killed run may.
func (b *bench) tear(n int64) {
	path := filepath.Join(b.Out, batch.RecordName)
	info, err := os.Stat(path)
	mustDo(b.t, err, os.Truncate(path, info.Size()-n))
}

// mustHaveRedone checks what the last run has appended to the record.
func (b *bench) mustHaveRedone(want []string) {
	b.t.Helper()
	var got []string
	all := b.record()
	for _, entry := range all[len(all)-len(want):] {
		got = append(got, entry["output"].(string))
	}
	slices.Sort(got)
	if !slices.Equal(got, want) {
		b.t.Errorf("redone: %q, want %q", got, want)
	}
}

// TestStrangeRecord: a file of that name that is no treatment record is left
// as it is.
func TestStrangeRecord(t *testing.T) {
	b := newBench(t)
	for _, text := range []string{"notes of the day\n", "{\"schema\":\"other/1\"}\n", "{}\n"} {
		path := b.file("out/"+batch.RecordName, []byte(text))
		b.render(filterChain, b.plain("a.wav")).must(t, exitNotStarted, path, "line 1", "move the file away")
		mustEqual(t, "record", string(read(t, path)), text)
		b.mustHold()
	}
}
