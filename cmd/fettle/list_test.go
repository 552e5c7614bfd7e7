package main

import (
	"bytes"
	"fmt"
	"os"
	"path/filepath"
	"strings"
	"testing"
)

// list renders what a list says, which is written into a file of this name.
func (b *bench) list(name, text string, args ...string) outcome {
	b.t.Helper()
	return fettle(append([]string{"render", "--plan", b.file(name, []byte(text)), "--out", b.Out}, args...)...)
}

// TestList: each recording goes through its own chain, as if it were treated by
// itself, and each chain is audited.
func TestList(t *testing.T) {
	b := newBench(t)
	b.plain("lists/tapes/a.wav")
	b.plain("lists/tapes/b.wav")
	b.plain("elsewhere/c d.wav")
	b.file("lists/chains/rumble.yaml", []byte("name: rumble\n"+filterChain))
	b.file("chains/none.yaml", []byte("name: none at all\n"+identityChain))
	// Other columns, another order, quotes, capitals and blanks around names.
	text := "title, Recording ,year,CHAIN\n" +
		"\"Side \"\"A\"\"\",tapes/a.wav,1971,chains/rumble.yaml\n" +
		"Side B,tapes/b.wav,1971,../chains/none.yaml\n" +
		"Both,\"" + b.path("elsewhere/c d.wav") + "\",1972," + b.path("chains/none.yaml") + "\n"
	for _, lead := range []string{"", "\ufeff"} {
		b.Out = b.path(fmt.Sprintf("out%d", len(lead)))
		got := b.list("lists/batch.csv", lead+text)
		got.must(t, exitDone)
		b.mustHold("c d.wav", "tapes/a.wav", "tapes/b.wav")
		if !strings.Contains(got.stdout, "audit of rumble\n") || !strings.Contains(got.stdout, "audit of none at all\n") {
			t.Errorf("stdout %q does not audit both chains", got.stdout)
		}
		for _, entry := range b.record() {
			want := map[any]string{"tapes/a.wav": "rumble", "tapes/b.wav": "none at all", "c d.wav": "none at all"}[entry["output"]]
			mustEqual(t, fmt.Sprint(entry["output"], ": chain"), entry["chain"], any(want))
		}
		mustEqual(t, "b.wav is the original", bytes.Equal(b.output("tapes/b.wav"), read(t, b.path("lists/tapes/b.wav"))), true)
		mustEqual(t, "a.wav is the original", bytes.Equal(b.output("tapes/a.wav"), read(t, b.path("lists/tapes/a.wav"))), false)

		b.list("lists/batch.csv", lead+text).must(t, exitDone) // and nothing is left to do
		mustEqual(t, "entries", len(b.record()), 3)
	}

	// Alone, through the chain that the list names, with the same dither.
	b.Out = b.path("alone")
	fettle("render", "--chain", b.path("lists/chains/rumble.yaml"), "--out", b.Out, b.path("lists")).must(t, exitDone)
	alone := b.output("tapes/a.wav")
	b.Out = b.path("out0")
	mustEqual(t, "as alone", bytes.Equal(b.output("tapes/a.wav"), alone), true)
}

// TestListFromItsFolder: where the program is started does not matter, nor whether
// the list's own path is relative.
func TestListFromItsFolder(t *testing.T) {
	b := newBench(t)
	in := b.plain("lists/tapes/a.wav")
	b.file("lists/chain.yaml", []byte(identityChain))
	b.file("lists/batch.csv", []byte("recording,chain\ntapes/a.wav,chain.yaml\n"))
	b.file("lists/rooted.csv", []byte("recording,chain\n"+in+",chain.yaml\n"))
	for i, place := range []struct{ dir, list string }{
		{"lists", "batch.csv"}, {"lists", "./batch.csv"}, {".", "lists/batch.csv"}, {"lists/tapes", "../batch.csv"},
		{"lists", "rooted.csv"}, {".", "lists/rooted.csv"}, {".", b.path("lists/rooted.csv")},
	} {
		t.Chdir(b.path(place.dir))
		b.Out = b.path(fmt.Sprintf("out%d", i))
		fettle("render", "--plan", place.list, "--out", b.Out).must(t, exitDone)
		b.mustHold("tapes/a.wav")
	}
}

// TestListInShards: a list is parted like any batch.
func TestListInShards(t *testing.T) {
	b := newBench(t)
	b.file("none.yaml", []byte(identityChain))
	b.file("some.yaml", []byte(filterChain))
	text := "recording,chain\n"
	for i := range 5 {
		b.recording(fmt.Sprintf("in/%d.wav", i), "pcm16", rate, 1, noise(1+1000*i, uint32(i+1)))
		text += fmt.Sprintf("in/%d.wav,%s.yaml\n", i, []string{"none", "some"}[i%2])
	}
	b.list("batch.csv", text).must(t, exitDone)
	want := b.hashes()
	b.Out = b.path("parts")
	b.list("batch.csv", text, "--shard", "1/2").must(t, exitDone)
	b.list("batch.csv", text, "--shard", "2/2").must(t, exitDone)
	b.gather().must(t, exitDone)
	mustEqual(t, "outputs", fmt.Sprint(b.hashes()), fmt.Sprint(want))
}

func TestListRefused(t *testing.T) {
	b := newBench(t)
	in := b.plain("in/a.wav")
	b.plain("in2/a.wav")
	b.chain(filterChain)
	b.file("broken.yaml", []byte("stages:\n  - highpass: {at: 70, order: 4}\n"))
	tests := []struct {
		name, text string
		args       []string
		words      []string
	}{
		{name: "with --chain", text: "recording,chain\nin/a.wav,chain.yaml\n", args: []string{"--chain", "chain.yaml"}, words: []string{"--plan", "leave out --chain"}},
		{name: "with inputs", text: "recording,chain\nin/a.wav,chain.yaml\n", args: []string{in}, words: []string{"--plan", "leave out inputs"}},
		{name: "empty", text: "", words: []string{"batch.csv", "is empty"}},
		{name: "no lines", text: "recording,chain\n", words: []string{"batch.csv", "no recording", "add lines"}},
		{name: "no column for chains", text: "recording,filter\nin/a.wav,chain.yaml\n", words: []string{"batch.csv", "line 1", "recording and chain", `"filter"`}},
		{name: "no header", text: "in/a.wav,chain.yaml\n", words: []string{"line 1", "recording and chain"}},
		{name: "semicolons", text: "recording;chain\nin/a.wav;chain.yaml\n", words: []string{"line 1", "recording and chain"}},
		{name: "a field too few", text: "recording,chain\nin/a.wav\n", words: []string{"batch.csv", "line 2", "number of fields"}},
		{name: "a field too many", text: "recording,chain\nin/a.wav,chain.yaml\n\nin2/a.wav,chain.yaml,x\n", words: []string{"batch.csv", "line 4", "number of fields"}},
		{name: "open quote", text: "recording,chain\n\"in/a.wav,chain.yaml\n", words: []string{"batch.csv", "quote"}},
		{name: "no recording", text: "recording,chain\nin/a.wav,chain.yaml\n,chain.yaml\n", words: []string{"batch.csv", "line 3", "names no recording or no chain"}},
		{name: "no chain", text: "recording,chain\nin/a.wav,\n", words: []string{"batch.csv", "line 2", "names no recording or no chain"}},
		{name: "missing chain", text: "recording,chain\nin/a.wav,chain.yaml\nin2/a.wav,gone.yaml\n", words: []string{"batch.csv, line 3", "gone.yaml", "no such chain file"}},
		{name: "broken chain", text: "recording,chain\nin/a.wav,broken.yaml\n", words: []string{"batch.csv, line 2", "broken.yaml:2:20", `"70" has no unit`}},
		{name: "twice", text: "recording,chain\nin/a.wav,chain.yaml\nin/a.wav,chain.yaml\n", words: []string{"in/a.wav", "both"}},
		{name: "twice by another name", text: "recording,chain\nin/a.wav,chain.yaml\nin/../in/A.wav,chain.yaml\n", words: []string{"in/a.wav", "in/A.wav", "both"}},
		{name: "bad phase", text: "recording,chain\nin/a.wav,chain.yaml\n", args: []string{"--phase", "sideways"}, words: []string{"sideways"}},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			t.Chdir(b.Dir)
			b.list("batch.csv", test.text, test.args...).must(t, exitNotStarted, test.words...)
			(&bench{t, b.Dir, b.Out}).mustHold()
		})
	}
	t.Run("missing", func(t *testing.T) {
		fettle("render", "--plan", b.path("gone.csv"), "--out", b.Out).must(t, exitNotStarted, "gone.csv", "cannot be read", "no such file")
		fettle("render", "--plan", b.path("in"), "--out", b.Out).must(t, exitNotStarted, b.path("in"), "directory")
	})
}

// TestListOfABadRecording costs that recording only.
func TestListOfABadRecording(t *testing.T) {
	b := newBench(t)
	b.plain("a.wav")
	b.chain(filterChain)
	mustDo(t, os.Mkdir(b.path("folder"), 0o777))
	b.list("batch.csv", "recording,chain\ngone.wav,chain.yaml\na.wav,chain.yaml\nfolder,chain.yaml\n").must(t, exitSomeFailed, b.path("gone.wav"), "no such file", filepath.Join(b.Dir, "folder"), "is a folder")
	b.mustHold("a.wav")
}
