package main

import (
	"fmt"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"
)

// TestRehash tells by contents what is done: a new time changes nothing, a new
// content does, though size and time are the old ones.
func TestRehash(t *testing.T) {
	tests := []struct {
		name   string
		change func(b *bench)
		args   []string
		redone []string
	}{
		{name: "nothing", args: []string{"--rehash"}},
		{name: "touched", args: []string{"--rehash"}, change: touchA},
		{name: "touched, by time", redone: []string{"a.wav"}, change: touchA},
		{name: "changed", args: []string{"--rehash"}, redone: []string{"a.wav"}, change: func(b *bench) { alter(b.t, b.path("in/a.wav")) }},
		{name: "changed, by time", change: func(b *bench) { alter(b.t, b.path("in/a.wav")) }}, // this is what --rehash is for
		{name: "changed output", args: []string{"--rehash"}, redone: []string{"b.wav"}, change: func(b *bench) { alter(b.t, filepath.Join(b.Out, "b.wav")) }},
		{name: "changed output, by time", change: func(b *bench) { alter(b.t, filepath.Join(b.Out, "b.wav")) }},
		{name: "longer", args: []string{"--rehash"}, redone: []string{"a.wav"}, change: func(b *bench) { b.recording("in/a.wav", "pcm16", rate, 1, noise(302, 1)) }},
		{name: "again", args: []string{"--rehash", "--again"}, redone: []string{"a.wav", "b.wav"}},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			b := newBench(t)
			b.plain("in/a.wav")
			b.plain("in/b.wav")
			b.render(filterChain, "--jobs", "1", b.path("in")).must(t, exitDone)
			if test.change != nil {
				test.change(b)
			}
			before := b.stats()
			b.render(filterChain, append(test.args, b.path("in"))...).must(t, exitDone)
			for _, rel := range []string{"a.wav", "b.wav"} {
				redone := strings.Contains(fmt.Sprint(test.redone), rel)
				mustEqual(t, rel+" was treated again", b.stats()[rel] != before[rel], redone)
			}
			mustEqual(t, "entries", len(b.record()), 2+len(test.redone))
			if test.redone != nil {
				fettle("verify", "--originals", b.Out).must(t, exitDone)
			}
		})
	}
}

func touchA(b *bench) {
	now := time.Now().Add(time.Hour)
	mustDo(b.t, os.Chtimes(b.path("in/a.wav"), now, now))
}

// TestStopOnError: what comes after a failure is left, what came before is kept,
// and the next run goes on.
func TestStopOnError(t *testing.T) {
	b := newBench(t)
	for _, rel := range []string{"in/a.wav", "in/c.wav", "in/deep/d.wav"} {
		b.plain(rel)
	}
	bad := b.file("in/b.wav", []byte("no sound"))
	got := b.render(filterChain, "--jobs", "1", "--stop-on-error", b.path("in"))
	got.must(t, exitSomeFailed, bad)
	if want := "1 recording cleaned into " + b.Out + ", 1 failed, 2 left\n"; !strings.HasSuffix(got.stdout, want) {
		t.Errorf("stdout %q does not end with %q", got.stdout, want)
	}
	b.mustHold("a.wav")
	mustEqual(t, "entries", len(b.record()), 2)
	b.plain("in/b.wav")
	b.render(filterChain, "--stop-on-error", b.path("in")).must(t, exitDone)
	b.mustHold("a.wav", "b.wav", "c.wav", "deep/d.wav")
}

// TestDryRun says what would be done and leaves everything as it is.
func TestDryRun(t *testing.T) {
	b := newBench(t)
	b.recording("in/a.wav", "pcm16", rate, 2, noise(2*2*rate, 1))
	b.recording("in/deep/line\nfeed \xe9.wav", "pcm24", 2*rate, 1, noise(rate, 1))
	b.file("in/bad.wav", []byte("no sound"))
	b.chain("name: rumble\n" + filterChain)
	dry := func(args ...string) outcome {
		before := b.everything()
		got := fettle(append([]string{"render", "--dry-run", "--chain", b.path("chain.yaml"), "--out", b.Out, b.path("in")}, args...)...)
		mustEqual(t, "what is there", fmt.Sprint(b.everything()), fmt.Sprint(before))
		return got
	}
	mustSay := func(got outcome, words ...string) {
		t.Helper()
		for _, word := range words {
			if !strings.Contains(got.stdout, word) {
				t.Errorf("stdout %q does not say %q", got.stdout, word)
			}
		}
	}
	got := dry("--removed", b.path("waste"), "--json", b.path("audit.json"))
	got.must(t, exitDone)
	lines := strings.Split(got.stdout, "\n")
	mustEqual(t, "lines", len(lines), 6) // a header, three recordings, a summary, nothing
	for i, words := range []string{"state recording chain rate", "to do in/a.wav rumble 8000 2.0 out/a.wav", "to do in/bad.wav rumble ? ?", `to do deep/line\nfeed \xe9.wav rumble 16000 0.5`} {
		for _, word := range strings.Fields(words) {
			if !strings.Contains(lines[i], word) {
				t.Errorf("line %q does not say %q", lines[i], word)
			}
		}
	}
	// 2 s of stereo in 16 bits and half a second in 24, and 32 bits of what is
	// removed: 64000 + 24000 and 128000 + 32000 bytes, and headers.
	mustSay(got, "3 recordings to clean, about 0.2 MB of outputs; 0 already done. Nothing was written.")
	if _, err := os.Stat(b.Out); err == nil {
		t.Error("the output folder was made")
	}
	mustSay(dry("--from", "0.5", "--to", "0.75"), "a.trial.wav", " 0.2 ")
	mustSay(dry("--shard", "1/3"), "1 recording to clean")

	mustDo(t, os.Remove(b.path("in/bad.wav")))
	b.render("name: rumble\n"+filterChain, b.path("in/a.wav")).must(t, exitDone)
	got = dry()
	got.must(t, exitDone)
	mustSay(got, "done ", "1 recording to clean", "1 already done")
	mustSay(dry("--again"), "2 recordings to clean", "0 already done")

	// Refused is what would be refused, and problems are told.
	dry("--removed", b.Out).must(t, exitNotStarted, "both go there")
	dry(b.path("gone.wav")).must(t, exitSomeFailed, "gone.wav", "no such file")
}

// TestStrangeNames go all the way, through shards, what is removed, records and
// back.
func TestStrangeNames(t *testing.T) {
	b := newBench(t)
	names := []string{" a b .wav", "a\nb.wav", "-x.wav", "\"q\".wav", "\u00e9.wav", "\xe9.wav", "d \n/\xff/c.wav", "$HOME.wav", "*.wav", "<&>.wav", "\\.wav"}
	for i, rel := range names {
		b.recording("in/"+rel, "pcm16", rate, 1, noise(100+i, uint32(i+1)))
	}
	waste := b.path("waste \xe8")
	for i := 1; i <= 2; i++ {
		b.shard(fmt.Sprintf("%d/2", i), "--removed", waste).must(t, exitDone)
	}
	b.gather().must(t, exitDone)
	got := fettle("verify", "--originals", b.Out)
	got.must(t, exitDone)
	mustEqual(t, "stdout", got.stdout, fmt.Sprintf("%d outputs as recorded\n", len(names)))
	mustEqual(t, "removed", len(b.removedOnly(waste)), len(names))
	b.shard("1/1", "--removed", waste).must(t, exitDone)
	mustEqual(t, "files after another run", len(b.removedOnly(waste)), len(names))
	mustEqual(t, "entries", len(b.record()), len(names))

	alter(t, filepath.Join(b.Out, "a\nb.wav"))
	got = fettle("verify", b.Out)
	got.must(t, exitSomeFailed, `a\nb.wav`)
	mustEqual(t, "lines of stderr", strings.Count(got.stderr, "\n"), 1)
}
