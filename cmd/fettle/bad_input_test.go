package main

import (
	"math"
	"os"
	"path/filepath"
	"testing"
)

// Tags of the WAVE format.
const (
	tagPCM   = 1
	tagFloat = 3
)

// TestBadRecordings: each costs itself only. A good one in the same batch is
// done, and nothing half-written is left.
func TestBadRecordings(t *testing.T) {
	good := wav{tag: tagPCM, channels: 1, rate: rate, bits: 16, data: make([]byte, 200)}
	silent := good
	silent.data = nil
	none := good
	none.channels = 0
	float := func(x float64) []byte {
		return wav{tag: tagFloat, channels: 2, rate: rate, bits: 32, data: floats(0, 0.5, 0, x, 0, 0)}.bytes()
	}
	tests := []struct {
		name    string
		content []byte
		words   []string
	}{
		{"text", []byte("Dear diary, today the engine ran again."), []string{"not a WAV file"}},
		{"empty", nil, []string{"the file is empty"}},
		{"header", good.bytes()[:30], []string{"byte 12", "ends inside the fmt chunk"}},
		{"no data", silent.bytes(), []string{"no audio"}},
		{"channels", none.bytes(), []string{"channels"}},
		{"nan", float(math.NaN()), []string{"frame 1, channel 2", "NaN"}},
		{"inf", float(math.Inf(1)), []string{"frame 1, channel 2", "+Inf"}},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			b := newBench(t)
			bad := b.file("in/bad.wav", test.content)
			b.file("in/good.wav", good.bytes())
			got := b.render(filterChain, b.path("in"))
			got.must(t, exitSomeFailed, append(test.words, bad)...)
			b.mustHold("good.wav")
			entry := b.record()[0]
			if entry["output"] != "bad.wav" {
				entry = b.record()[1]
			}
			mustEqual(t, "recorded input", entry["input"], any(bad))
			mustEqual(t, "status", entry["status"], any("failed"))
			if text, _ := entry["error"].(string); text == "" {
				t.Error("the record does not say why")
			}
		})
	}
}

// TestTruncatedData: what is whole is treated, and the record says what is not.
func TestTruncatedData(t *testing.T) {
	b := newBench(t)
	b.file("cut.wav", wav{tag: tagPCM, channels: 2, rate: rate, bits: 16, data: make([]byte, 4*50+3), claimed: 4 * 90}.bytes())
	got := b.render(identityChain, b.path("cut.wav"))
	got.must(t, exitDone, "cut.wav: warning: ", "200 bytes to the last whole frame", "50 frames")
	b.mustHold("cut.wav")
	entry := b.last()
	mustEqual(t, "frames", entry["frames"], any(50.0))
	mustEqual(t, "status", entry["status"], any("done"))
	if warnings, _ := entry["warnings"].([]any); len(warnings) == 0 {
		t.Error("no warning in the record")
	}
	mustEqual(t, "size of the output", len(b.output("cut.wav")), 80+4*50)
}

// TestFrequencyBeyondHalfTheRate costs the recordings of that rate.
func TestFrequencyBeyondHalfTheRate(t *testing.T) {
	for _, at := range []string{"4 kHz", "5 kHz"} {
		b := newBench(t)
		low := b.plain("in/low.wav")
		b.recording("in/high.wav", "pcm16", 2*rate, 1, noise(301, 1))
		got := b.render("stages:\n  - highpass: {at: "+at+", order: 2}\n", b.path("in"))
		got.must(t, exitSomeFailed, low, "chain.yaml:2:", "half")
		b.mustHold("high.wav")
	}
}

// TestCannotStart: wrong chains, options and places end with status 1 before
// anything is written.
func TestCannotStart(t *testing.T) {
	b := newBench(t)
	in := b.plain("in/a.wav")
	empty := b.path("empty")
	mustDo(t, os.Mkdir(empty, 0o777), os.Symlink("in", b.path("link")))
	chain := b.chain(filterChain)
	wrong := func(name, text string) string { return b.file(name, []byte(text)) }
	render := func(args ...string) []string {
		return append([]string{"render", "--chain", chain, "--out", b.Out, in}, args...)
	}
	from := func(chain string) []string { return []string{"render", "--chain", chain, "--out", b.Out, in} }
	into := func(out string) []string { return []string{"render", "--chain", chain, "--out", out, in} }
	tests := []struct {
		name  string
		args  []string
		words []string
	}{
		{"unknown chain key", from(wrong("key.yaml", "stages:\n  - highpass: {at: 70 Hz, order: 4, slop: 1}\n")), []string{"key.yaml:2:37", "slop", "order"}},
		{"missing unit", from(wrong("unit.yaml", "stages:\n  - highpass: {at: 70, order: 4}\n")), []string{"unit.yaml:2:20", `"70" has no unit`}},
		{"not YAML", from(wrong("brace.yaml", "stages:\n  - highpass: {at: 70 Hz\n")), []string{"brace.yaml:2:", "YAML"}},
		{"missing chain", from(b.path("gone.yaml")), []string{"gone.yaml", "no such chain file", "check the name"}},
		{"chain is a folder", from(empty), []string{empty, "is a folder"}},
		{"no --chain", []string{"render", "--out", b.Out, in}, []string{"--chain", "missing"}},
		{"no --out", []string{"render", "--chain", chain, in}, []string{"--out", "missing"}},
		{"empty --out", into(""), []string{"--out", "missing"}},
		{"no input named", []string{"render", "--chain", chain, "--out", b.Out}, []string{"no input"}},
		{"no input matched", []string{"render", "--chain", chain, "--out", b.Out, empty}, []string{"no recording matched", empty}},
		{"no file matches", []string{"render", "--chain", chain, "--out", b.Out, b.path("in/**/*.wave")}, []string{"in/**/*.wave", "matches no"}},
		{"bad pattern", []string{"render", "--chain", chain, "--out", b.Out, b.path("in/[a")}, []string{"in/[a", "pattern"}},
		{"missing input", []string{"render", "--chain", chain, "--out", b.Out, b.path("gone.wav")}, []string{"gone.wav", "no such file or folder"}},
		{"out is the input folder", into(b.path("in")), []string{in, "original"}},
		{"out is a link to it", into(b.path("link")), []string{"link/a.wav", "original"}},
		{"out is it by a detour", into(b.path("in") + "/../empty/../in"), []string{in, "original"}},
		{"out below a file", into(chain + "/deeper"), []string{"chain.yaml/deeper", "output folder", "choose another"}},
		{"out is a file", into(chain), []string{chain, "output folder", "choose another"}},
		{"out in /proc", into("/proc/nowhere"), []string{"/proc/nowhere", "output folder", "choose another"}},
		{"unknown flag", render("--bogus"), []string{"--bogus", "no such flag", "fettle render --help"}},
		{"flag without value", render("--format"), []string{"--format", "value is missing"}},
		{"bad --headroom", render("--headroom", "lots"), []string{"--headroom", `"lots"`, "fit"}},
		{"--headroom without unit", render("--headroom", "3"), []string{"--headroom", `"3" has no unit`}},
		{"--headroom that raises", render("--headroom", "-3 dB"), []string{"--headroom", "-3 dB", "raise"}},
		{"bad --format", render("--format", "pcm12"), []string{"--format", "pcm12", "pcm24"}},
		{"a phase that no rate helps", append(from(wrong("odd.yaml", "stages:\n  - highpass: {at: 70 Hz, order: 3}\n")), "--phase", "zero"), []string{"odd.yaml:2:5", "use order 4"}},
		{"bad --phase", render("--phase", "sideways"), []string{"--phase", "sideways", "minimum"}},
		{"bad --jobs", render("--jobs", "many"), []string{"jobs", "many"}},
		{"--jobs 0", render("--jobs", "0"), []string{"--jobs", "0"}},
		{"--json below a file", render("--json", chain+"/x.json"), []string{"chain.yaml/x.json", "cannot be written"}},
		{"--json in no folder", render("--json", b.path("gone/x.json")), []string{"gone/x.json", "cannot be written"}},
		{"--json is a folder", render("--json", empty), []string{empty, "choose another file"}},
		{"unknown command", []string{"polish", in}, []string{`"polish"`, "no such command"}},
		{"unknown flag of none", []string{"--bogus"}, []string{"--bogus", "fettle --help"}},
		{"unknown audit", []string{"audit", "bogus"}, []string{`"bogus"`, "fettle audit --help"}},
		{"audit of nothing", []string{"audit", "chain"}, []string{"one chain file, not 0"}},
		{"audit of two", []string{"audit", "chain", chain, chain}, []string{"one chain file, not 2"}},
		{"audit of a missing chain", []string{"audit", "chain", b.path("gone.yaml")}, []string{"gone.yaml"}},
		{"audit beyond half the rate", []string{"audit", "chain", "--rate", "150 Hz", chain}, []string{"chain.yaml:2:", "half"}},
		{"a rate without its k", []string{"audit", "chain", "--rate", "48", chain}, []string{"--rate", "48k or 48 Hz"}},
		{"a recording for a chain", []string{"audit", "chain", in}, []string{"a.wav", "is a recording and not a chain"}},
		{"a report over a recording", []string{"audit", "chain", "--json", in, chain}, []string{"a.wav", "no report of fettle's"}},
		{"a report over the chain", []string{"audit", "chain", "--json", chain, chain}, []string{"chain.yaml", "no report of fettle's"}},
		{"a report over an input", render("--json", in), []string{"a.wav", "no report of fettle's"}},
		{"coefficients over a recording", []string{"export", "--as", "json", "--out", in, chain}, []string{"a.wav", "no report of fettle's"}},
		{"audit --json below a file", []string{"audit", "chain", chain, "--json", chain + "/x"}, []string{"chain.yaml/x", "cannot be written"}},
		{"--rate in words", []string{"audit", "chain", "--rate", "fast", chain}, []string{"--rate", "fast"}},
		{"--rate of nothing", []string{"audit", "chain", "--rate", "0", chain}, []string{"--rate", "whole number"}},
		{"--rate below 0", []string{"audit", "chain", "--rate", "-48k", chain}, []string{"--rate", "whole number"}},
		{"--rate with a fraction", []string{"audit", "chain", "--rate", "44100.5 Hz", chain}, []string{"--rate", "whole number"}},
		{"--rate in dB", []string{"audit", "chain", "--rate", "48 dB", chain}, []string{"--rate", "dB"}},
		{"--rate beyond bounds", []string{"audit", "chain", "--rate", "1e12", chain}, []string{"--rate", "whole number"}},
	}
	original := hash(t, in)
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			got := fettle(test.args...)
			got.must(t, exitNotStarted, test.words...)
			mustEqual(t, "stdout", got.stdout, "")
			(&bench{t, b.Dir, b.Out}).mustHold()
			left, err := filepath.Glob(b.path("in/*"))
			mustDo(t, err)
			hidden, err := filepath.Glob(b.path(".*"))
			mustDo(t, err)
			if len(left) != 1 || len(hidden) != 0 || hash(t, in) != original {
				t.Errorf("left behind %q and %q", left, hidden)
			}
		})
	}
}

// TestBadInputBesideGood: a name that leads nowhere costs that recording only.
func TestBadInputBesideGood(t *testing.T) {
	tests := []struct {
		name  string
		make  func(b *bench) string
		words []string
	}{
		{"gone", func(b *bench) string { return b.path("gone.wav") }, []string{"gone.wav", "no such file or folder"}},
		{"below a file", func(b *bench) string { return b.path("good.wav/x.wav") }, []string{"good.wav/x.wav", "not a directory"}},
		{"device", func(*bench) string { return os.DevNull }, []string{os.DevNull, "neither a file nor a folder"}},
		{"pattern without match", func(b *bench) string { return b.path("none/*.wav") }, []string{"none/*.wav", "matches no"}},
		{"link to nowhere", func(b *bench) string {
			mustDo(b.t, os.Mkdir(b.path("in"), 0o777), os.Symlink("nowhere", b.path("in/dangling.wav")))
			return b.path("in")
		}, []string{"in/dangling.wav", "cannot be opened"}},
		{"link to itself", func(b *bench) string {
			mustDo(b.t, os.Symlink("ring.wav", b.path("ring.wav")))
			return b.path("ring.wav")
		}, []string{"ring.wav", "too many levels of symbolic links"}},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			b := newBench(t)
			bad := test.make(b)
			got := b.render(identityChain, bad, b.plain("good.wav"))
			got.must(t, exitSomeFailed, test.words...)
			b.mustHold("good.wav")
		})
	}
}
