package main

import (
	"os"
	"path/filepath"
	"testing"
)

// removedOnly lists the files in a folder for what is removed, but its mark.
func (b *bench) removedOnly(folder string) []string {
	b.t.Helper()
	var out []string
	for _, rel := range (&bench{b.t, b.Dir, folder}).outputs() {
		if rel != "treatment.removed.txt" {
			out = append(out, rel)
		}
	}
	return out
}

// TestRemovedFolder mirrors the output folder, is recorded, and is no input.
func TestRemovedFolder(t *testing.T) {
	b := newBench(t)
	b.plain("in/deep/a.wav")
	waste := b.path("in/waste") // below the inputs
	b.render(filterChain, "--removed", waste, b.path("in")).must(t, exitDone)
	b.mustHold("deep/a.wav")
	mustEqual(t, "removed", len(b.removedOnly(waste)), 1)
	last := b.last()
	mustEqual(t, "recorded path", last["removed"], any(filepath.Join(waste, "deep/a.wav")))
	mustEqual(t, "recorded hash", last["sha256_removed"], any(hash(t, filepath.Join(waste, "deep/a.wav"))))

	// Done is what has both; the folder is not taken for inputs, asked for or not.
	for _, args := range [][]string{{"--removed", waste}, nil} {
		b.render(filterChain, append(args, b.path("in"))...).must(t, exitDone)
		mustEqual(t, "entries", len(b.record()), 1)
	}
	mustDo(t, os.Remove(filepath.Join(waste, "deep/a.wav")))
	b.render(filterChain, "--removed", waste, b.path("in")).must(t, exitDone)
	mustEqual(t, "entries once a file was deleted", len(b.record()), 2)
	b.render(filterChain, "--removed", b.path("elsewhere"), b.path("in")).must(t, exitDone)
	mustEqual(t, "entries for another folder", len(b.record()), 3)
	b.render(filterChain, "--removed", b.path("elsewhere"), b.path("in")).must(t, exitDone)
	mustEqual(t, "entries for it again", len(b.record()), 3)
	alter(t, b.path("elsewhere/deep/a.wav"))
	b.render(filterChain, "--rehash", "--removed", b.path("elsewhere"), b.path("in")).must(t, exitDone)
	mustEqual(t, "entries once a file was changed", len(b.record()), 4)
}

// TestRemovedIsRefused where it would land on outputs, originals or anything else
// that is there.
func TestRemovedIsRefused(t *testing.T) {
	b := newBench(t)
	in := b.plain("in/a.wav")
	b.plain("mine/a.wav")
	mustDo(t, os.Symlink("out", b.path("link")), os.Mkdir(b.Out, 0o777))
	for _, test := range []struct {
		folder string
		words  []string
	}{
		{b.Out, []string{"a.wav", "what is removed would both go there", "--removed"}},
		{b.path("in/../out"), []string{"both go there"}},
		{b.path("link"), []string{"both go there"}},
		{b.path("in"), []string{in, "would replace an original"}},
		{b.path("mine"), []string{b.path("mine/a.wav"), "is there already", "treatment.removed.txt"}},
		{in, []string{in, "folder for what is removed", "cannot be made", "--removed"}},
		{"/proc/nowhere", []string{"/proc/nowhere", "folder for what is removed", "--removed"}},
	} {
		before := b.everything()
		b.render(filterChain, "--removed", test.folder, in).must(t, exitNotStarted, test.words...)
		for path, was := range before {
			if now := b.everything()[path]; now != was && path != "chain.yaml" {
				t.Errorf("--removed %s: %s changed", test.folder, path)
			}
		}
	}
	b.render(filterChain, "--removed", b.path("mine"), "--again", in).must(t, exitDone)

	// And where parts of it are links, though nothing is there yet.
	b.plain("in2/deep/a.wav")
	b.render(filterChain, "--removed", b.path("link"), b.path("in2")).must(t, exitNotStarted, "both go there")
}

// TestFailedLeavesNothingRemoved: neither output nor what was removed of a
// recording that fails, nor their folders; an earlier treatment outlasts it.
func TestFailedLeavesNothingRemoved(t *testing.T) {
	b := newBench(t)
	waste := b.path("waste")
	loud := tone(4000, 1, 0.25, 0.8)
	for i := range loud {
		loud[i] *= 0.99
	}
	b.recording("in/deep/loud.wav", "pcm16", rate, 1, loud)
	b.file("in/other/bad.wav", []byte("no sound"))
	const boost = "stages:\n  - gain: {by: 6 dB}\n"
	b.render(boost, "--removed", waste, b.path("in")).must(t, exitSomeFailed, "loud.wav", "--headroom", "bad.wav")
	b.mustHold()
	mustEqual(t, "files and folders of what was removed", len(b.removedOnly(waste)), 0)
	for _, entry := range b.record() {
		mustEqual(t, "recorded as removed", entry["removed"], any(""))
	}

	mustDo(t, os.Remove(b.path("in/other/bad.wav")))
	b.render(boost, "--headroom", "fit", "--removed", waste, b.path("in")).must(t, exitDone)
	done := b.last()
	// The output is twice the original, lowered: x g - 2 x g.
	out, removed := samples(t, filepath.Join(b.Out, "deep/loud.wav")), samples(t, filepath.Join(waste, "deep/loud.wav"))
	for i := range out {
		// 6 dB are a factor of 1.995; dither adds up to 1.5 steps to the output.
		if d := abs(removed[i] + out[i]*(1-1/1.9952623149688795)); !(d <= 2.0/32768) {
			t.Fatalf("frame %d: %g where the output is %g", i, removed[i], out[i])
		}
	}
	b.render(boost, "--removed", waste, b.path("in")).must(t, exitSomeFailed, "loud.wav")
	mustEqual(t, "hash of what the earlier run removed", hash(t, filepath.Join(waste, "deep/loud.wav")), done["sha256_removed"].(string))
	mustEqual(t, "hash of its output", hash(t, filepath.Join(b.Out, "deep/loud.wav")), done["sha256_out"].(string))
}
