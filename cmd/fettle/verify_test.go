package main

import (
	"context"
	"fmt"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"
)

// alter changes one byte in the middle of a file and keeps its time of change.
func alter(t *testing.T, path string) {
	t.Helper()
	info, err := os.Stat(path)
	mustDo(t, err)
	raw := read(t, path)
	raw[len(raw)/2] ^= 1
	mustDo(t, os.WriteFile(path, raw, 0o666), os.Chtimes(path, info.ModTime(), info.ModTime()))
}

// TestVerify: what has changed since it was treated is found, and nothing else.
func TestVerify(t *testing.T) {
	out := func(rel string) string { return filepath.Join("out", rel) }
	tests := []struct {
		name   string
		change func(b *bench)
		args   []string
		words  []string // of the failures; nil: there is none
		stdout string
	}{
		{name: "unchanged", stdout: "2 outputs as recorded\n"},
		{name: "unchanged, with originals", args: []string{"--originals"}, stdout: "2 outputs as recorded\n"},
		{name: "one file at once", args: []string{"--jobs", "1"}, stdout: "2 outputs as recorded\n"},
		{name: "moved", change: func(b *bench) {
			to := b.path("elsewhere")
			mustDo(b.t, os.Rename(b.Out, to))
			b.Out = to
		}, stdout: "2 outputs as recorded\n"},
		{name: "touched", change: func(b *bench) {
			now := time.Now().Add(time.Hour)
			mustDo(b.t, os.Chtimes(b.path(out("a.wav")), now, now))
		}, stdout: "2 outputs as recorded\n"},
		{name: "changed byte", change: func(b *bench) { alter(b.t, b.path(out("a.wav"))) },
			words: []string{out("a.wav"), "is not what the record says", "SHA-256", "render it again"}, stdout: "1 output as recorded, 1 not\n"},
		{name: "shortened", change: func(b *bench) { mustDo(b.t, os.Truncate(b.path(out("deep/b.wav")), 300)) },
			words: []string{out("deep/b.wav"), "is not what the record says"}, stdout: "1 output as recorded, 1 not\n"},
		{name: "deleted", change: func(b *bench) { mustDo(b.t, os.RemoveAll(b.path(out("deep")))) },
			words: []string{out("deep/b.wav"), "no such file"}, stdout: "1 output as recorded, 1 not\n"},
		{name: "a folder in its place", change: func(b *bench) {
			mustDo(b.t, os.Remove(b.path(out("a.wav"))), os.Mkdir(b.path(out("a.wav")), 0o777))
		}, words: []string{out("a.wav"), "directory"}, stdout: "1 output as recorded, 1 not\n"},
		{name: "both", change: func(b *bench) {
			alter(b.t, b.path(out("a.wav")))
			alter(b.t, b.path(out("deep/b.wav")))
		}, words: []string{out("a.wav"), out("deep/b.wav")}, stdout: "0 outputs as recorded, 2 not\n"},
		{name: "changed original, not asked for", change: func(b *bench) { alter(b.t, b.path("in/a.wav")) }, stdout: "2 outputs as recorded\n"},
		{name: "changed original", change: func(b *bench) { alter(b.t, b.path("in/a.wav")) }, args: []string{"--originals"},
			words: []string{"in/a.wav", "is not what the record says", "find the original"}, stdout: "1 output as recorded, 1 not\n"},
		{name: "missing original", change: func(b *bench) { mustDo(b.t, os.Remove(b.path("in/a.wav"))) }, args: []string{"--originals"},
			words: []string{"in/a.wav", "no such file"}, stdout: "1 output as recorded, 1 not\n"},
		{name: "changed what was removed", change: func(b *bench) { alter(b.t, b.path("waste/a.wav")) },
			words: []string{"waste/a.wav", "is not what the record says"}, stdout: "1 output as recorded, 1 not\n"},
		{name: "deleted what was removed", change: func(b *bench) { mustDo(b.t, os.Remove(b.path("waste/deep/b.wav"))) },
			words: []string{"waste/deep/b.wav", "no such file"}, stdout: "1 output as recorded, 1 not\n"},
		{name: "a stranger", change: func(b *bench) {
			b.plain(out("deep/c.WAV"))
			b.file(out("notes.txt"), []byte("heard"))
		}, stdout: "OUT/deep/c.WAV: is in no record\n2 outputs as recorded\n"},
		{name: "left by a kill", change: func(b *bench) { b.plain(out("deep/.b.wav1234567890123456789")) },
			stdout: "OUT/deep/.b.wav1234567890123456789: is in no record\n2 outputs as recorded\n"},
		{name: "no line for one", change: func(b *bench) { b.tear(1) }, stdout: "OUT/deep/b.wav: is in no record\n1 output as recorded\n"},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			b := newBench(t)
			b.plain("in/a.wav")
			b.plain("in/deep/b.wav")
			b.render(filterChain, "--jobs", "1", "--removed", b.path("waste"), b.path("in")).must(t, exitDone)
			if test.change != nil {
				test.change(b)
			}
			before := b.everything()
			got := fettle(append([]string{"verify", b.Out}, test.args...)...)
			status := exitDone
			if test.words != nil {
				status = exitSomeFailed
			}
			got.must(t, status, test.words...)
			mustEqual(t, "stdout", got.stdout, strings.ReplaceAll(test.stdout, "OUT", b.Out))
			mustEqual(t, "what is there", fmt.Sprint(b.everything()), fmt.Sprint(before))
		})
	}
}

// TestVerifyWhatIsRemovedInside: what was taken out is no stranger below Out.
func TestVerifyWhatIsRemovedInside(t *testing.T) {
	b := newBench(t)
	b.plain("in/a.wav")
	b.render(filterChain, "--removed", filepath.Join(b.Out, "removed"), b.path("in")).must(t, exitDone)
	got := fettle("verify", b.Out)
	got.must(t, exitDone)
	mustEqual(t, "stdout", got.stdout, "1 output as recorded\n")
}

// TestVerifyOfTheLast treatment: what came before does not count.
func TestVerifyOfTheLast(t *testing.T) {
	b := newBench(t)
	b.plain("in/a.wav")
	b.render(filterChain, b.path("in")).must(t, exitDone)
	b.render(identityChain, b.path("in")).must(t, exitDone)
	mustEqual(t, "entries", len(b.record()), 2)
	fettle("verify", b.Out).must(t, exitDone)
}

func TestVerifyCannotStart(t *testing.T) {
	b := newBench(t)
	b.plain("in/a.wav")
	fettle("verify").must(t, exitNotStarted, "verify: takes one folder", "fettle verify --help")
	fettle("verify", b.Dir, b.Dir).must(t, exitNotStarted, "takes one folder")
	fettle("verify", b.path("gone")).must(t, exitNotStarted, b.path("gone"), "no treatment.jsonl", "that render wrote to")
	fettle("verify", b.path("in")).must(t, exitNotStarted, b.path("in"), "no treatment.jsonl")
	b.render(filterChain, "--removed", b.path("waste"), b.path("in")).must(t, exitDone)
	fettle("verify", b.path("waste")).must(t, exitNotStarted, b.path("waste"), "no treatment.jsonl")
	mustDo(t, os.WriteFile(filepath.Join(b.Out, "treatment.jsonl"), []byte("{}\n"), 0o666))
	fettle("verify", b.Out).must(t, exitNotStarted, "treatment.jsonl", "line 1 is none of its kind")
}

func TestVerifyInterrupted(t *testing.T) {
	b := newBench(t)
	b.plain("in/a.wav")
	b.render(filterChain, b.path("in")).must(t, exitDone)
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	got := fettleIn(ctx, "verify", b.Out)
	got.must(t, exitInterrupted, "interrupted")
	mustEqual(t, "stdout", got.stdout, "")
}
