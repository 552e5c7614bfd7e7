package main

import (
	"context"
	"strings"
	"testing"
	"unicode/utf8"
)

// TestHelp fits 80 columns and tells every flag and the exit statuses.
func TestHelp(t *testing.T) {
	tests := []struct{ args, words string }{
		{"", "render audit 130 --version"},
		{"--help", "render audit 130"},
		{"render --help", "--chain --out --phase --format --headroom --jobs --again --json 130 pcm24 treatment.jsonl"},
		{"render -h", "--chain"},
		{"audit", "chain"},
		{"audit --help", "chain"},
		{"audit chain --help", "--rate --phase --json 130 48k"},
	}
	for _, test := range tests {
		got := fettle(strings.Fields(test.args)...)
		got.must(t, exitDone)
		for line := range strings.Lines(got.stdout) {
			if n := utf8.RuneCountInString(strings.TrimSuffix(line, "\n")); n > 80 {
				t.Errorf("fettle %s: a line of %d columns: %s", test.args, n, line)
			}
		}
		for _, word := range strings.Fields(test.words) {
			if !strings.Contains(got.stdout, word) {
				t.Errorf("fettle %s does not tell of %s: %s", test.args, word, got.stdout)
			}
		}
	}
}

func TestVersion(t *testing.T) {
	got := fettle("--version")
	got.must(t, exitDone)
	mustEqual(t, "stdout", got.stdout, "fettle version "+version()+"\n")
}

// TestQuietInAPipe: when all goes well, standard error is silent, and standard
// output tells how many recordings were cleaned.
func TestQuietInAPipe(t *testing.T) {
	b := newBench(t)
	in := b.plain("a.wav")
	for _, want := range []string{"1 recording cleaned into " + b.Out + "\n", "0 recordings cleaned into " + b.Out + ", 1 already done\n"} {
		got := b.render(filterChain, in)
		got.must(t, exitDone)
		if !strings.HasSuffix(got.stdout, want) || strings.ContainsAny(got.stdout, "\r\x1b") {
			t.Errorf("stdout %q, want it to end with %q and no control characters", got.stdout, want)
		}
	}
}

// TestPlain: what a file's name may do to a terminal.
func TestPlain(t *testing.T) {
	for text, want := range map[string]string{
		"a b.wav": "a b.wav", "é 音": "é 音", "a\nb": `a\nb`, "\x1b[2J": `\x1b[2J`, "\xe9.wav": `\xe9.wav`, "\u0085": `\xc2\x85`, "�": "�",
	} {
		mustEqual(t, "plain", plain(text), want)
	}
}

// TestInterruptedBeforeTheFirst: nothing is written but an empty record, and
// the next run does it all.
func TestInterruptedBeforeTheFirst(t *testing.T) {
	b := newBench(t)
	b.plain("in/a.wav")
	b.plain("in/deep/b.wav")
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	got := fettleIn(ctx, "render", "--chain", b.chain(filterChain), "--out", b.Out, b.path("in"))
	got.must(t, exitInterrupted, "interrupted", "the same command goes on")
	b.mustHold()
	b.render(filterChain, b.path("in")).must(t, exitDone)
	b.mustHold("a.wav", "deep/b.wav")
}

// TestInterruptedAudit does not wait for the audit to end.
func TestInterruptedAudit(t *testing.T) {
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	for range 20 { // a finished audit and a signal may race
		got := fettleIn(ctx, "audit", "chain", "--rate", "8k", sampleChain("monitor"), "--phase", "iir")
		if got.status == exitInterrupted {
			got.must(t, exitInterrupted, "interrupted")
			mustEqual(t, "stdout", got.stdout, "")
			return
		}
	}
	t.Error("an interrupted audit goes on to its end")
}
