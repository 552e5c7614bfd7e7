package main

import (
	"os"
	"path/filepath"
	"testing"

	"fettle/cmd/fettle/internal/batch"
)

// TestInputs: what is taken, and where it goes.
func TestInputs(t *testing.T) {
	tests := []struct {
		name  string
		files []string
		args  []string // below the bench's folder
		want  []string
	}{
		{"file", []string{"in/a.wav", "in/b.wav"}, []string{"in/b.wav"}, []string{"b.wav"}},
		{"any ending when named", []string{"in/a.bwf"}, []string{"in/a.bwf"}, []string{"a.bwf"}},
		{"folder", []string{"in/a.wav", "in/deep/er/b.WAV", "in/c.wave", "in/d.txt"}, []string{"in"}, []string{"a.wav", "c.wave", "deep/er/b.WAV"}},
		{"two folders", []string{"x/a.wav", "y/b.wav"}, []string{"x", "y"}, []string{"a.wav", "b.wav"}},
		{"pattern", []string{"in/a.wav", "in/deep/er/b.wav", "in/c.txt"}, []string{"in/**/*"}, []string{"a.wav", "deep/er/b.wav"}},
		{"pattern in the middle", []string{"in/1/x/a.wav", "in/2/x/a.wav", "in/2/y/a.wav"}, []string{"in/*/x/*.wav"}, []string{"1/x/a.wav", "2/x/a.wav"}},
		{"braces", []string{"in/a.wav", "in/b.wav", "in/c.wav"}, []string{"in/{a,c}.wav"}, []string{"a.wav", "c.wav"}},
		{"name that looks like a pattern", []string{"in/[a].wav", "in/a.wav"}, []string{"in/[a].wav"}, []string{"[a].wav"}},
		{"named twice", []string{"in/a.wav"}, []string{"in/a.wav", "in", "in/../in/a.wav", "in/*.wav"}, []string{"a.wav"}},
		{"hidden", []string{"in/.a.wav", "in/.deep/b.wav", "in/c.wav"}, []string{"in", "in/**/*.wav"}, []string{"c.wav"}},
		{"hidden, named", []string{"in/.a.wav"}, []string{"in/.a.wav"}, []string{".a.wav"}},
		{"strange names", []string{"in/a b.wav", "in/a\nb.wav", "in/-x.wav", "in/\"q\".wav", "in/\u00e9.wav", "in/\xe9.wav", "in/\xe8.wav"}, []string{"in"},
			[]string{"\"q\".wav", "-x.wav", "a\nb.wav", "a b.wav", "\u00e9.wav", "\xe8.wav", "\xe9.wav"}},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			b := newBench(t)
			for _, f := range test.files {
				b.plain(f)
			}
			var args []string
			for _, a := range test.args {
				args = append(args, b.Dir+"/"+a)
			}
			b.render(identityChain, args...).must(t, exitDone)
			b.mustHold(test.want...)
			mustEqual(t, "lines in the record", len(b.record()), len(test.want))
			outputs := map[any]bool{}
			for _, entry := range b.record() {
				outputs[entry["output"]] = true
			}
			mustEqual(t, "different outputs in the record", len(outputs), len(test.want))

			// And a second run finds them all done.
			b.render(identityChain, args...).must(t, exitDone)
			mustEqual(t, "lines in the record after a second run", len(b.record()), len(test.want))
		})
	}
}

// TestCollisions are refused before anything is done.
func TestCollisions(t *testing.T) {
	for _, names := range [][2]string{
		{"x/a.wav", "y/a.wav"}, {"x/a.wav", "y/A.WAV"}, {"x/deep/a.wav", "y/Deep/a.wav"},
		// One letter in two forms: composed, and decomposed as some systems store it.
		{"x/\u00e9.wav", "y/e\u0301.wav"}, {"x/\u00c9.wav", "y/e\u0301.wav"}, {"x/\xff/\u00e9.wav", "y/\xff/e\u0301.wav"},
	} {
		b := newBench(t)
		first, second := b.plain(names[0]), b.plain(names[1])
		got := b.render(identityChain, b.path("x"), b.path("y"))
		got.must(t, exitNotStarted, plain(first), plain(second), "both")
		mustEqual(t, "files below out", len(b.outputs()), 0)
	}
}

// TestTheRecordIsNoOutput of a recording that has its name.
func TestTheRecordIsNoOutput(t *testing.T) {
	b := newBench(t)
	got := b.render(identityChain, b.plain("in/"+batch.RecordName))
	got.must(t, exitNotStarted, batch.RecordName, "another name")
	mustEqual(t, "files below out", len(b.outputs()), 0)
}

// TestOutBelowTheInputs: outputs are not taken as inputs by a second run.
func TestOutBelowTheInputs(t *testing.T) {
	for _, pattern := range []string{"", "/**/*.wav"} {
		b := newBench(t)
		b.Out = b.path("in/cleaned")
		b.plain("in/a.wav")
		for range 2 {
			b.render(identityChain, b.path("in")+pattern).must(t, exitDone)
			b.mustHold("a.wav")
			mustEqual(t, "lines in the record", len(b.record()), 1)
		}
	}
}

// TestInputsBelowOut, which is no harm as long as outputs go elsewhere in it.
func TestInputsBelowOut(t *testing.T) {
	for _, pattern := range []string{"", "/**/*.wav"} {
		b := newBench(t)
		b.Out = b.path("all")
		b.plain("all/raw/a.wav")
		b.render(identityChain, b.path("all/raw")+pattern).must(t, exitDone)
		b.mustHold("a.wav", "raw/a.wav")
	}
}

// TestLinks: to files they are followed, to folders only when named, and a
// circle does no harm.
func TestLinks(t *testing.T) {
	for _, arg := range []string{"in", "in/**/*.wav", "link", "link/**/*.wav"} {
		b := newBench(t)
		b.plain("in/sub/a.wav")
		b.plain("elsewhere/b.wav")
		b.plain("elsewhere/deep/c.wav")
		mustDo(t, os.Symlink("..", b.path("in/sub/circle")), os.Symlink("../elsewhere/b.wav", b.path("in/b.wav")),
			os.Symlink("../elsewhere/deep", b.path("in/deep")), os.Symlink("../elsewhere", b.path("in/folder.wav")),
			os.Symlink("in", b.path("link")))
		b.render(identityChain, b.path(arg)).must(t, exitDone)
		b.mustHold("b.wav", "sub/a.wav")
	}
}

// TestPatternThatLeavesItsFolder would put outputs outside the output folder.
func TestPatternThatLeavesItsFolder(t *testing.T) {
	b := newBench(t)
	b.plain("in/x/a.wav")
	b.plain("other/b.wav")
	got := b.render(identityChain, b.Dir+"/in/*/../../other/*.wav")
	got.must(t, exitNotStarted, "other/b.wav", "before its first *")
	mustEqual(t, "files below out", len(b.outputs()), 0)
}

// TestFlagsAnywhere: behind and between arguments; behind -- there are none.
func TestFlagsAnywhere(t *testing.T) {
	b := newBench(t)
	b.plain("in/a.wav")
	b.plain("in/-b.wav")
	chain := b.chain(identityChain)
	t.Chdir(b.path("in"))
	fettle("render", "a.wav", "--chain="+chain, "--jobs", "1", "--out", b.Out, "--", "-b.wav").must(t, exitDone)
	b.mustHold("-b.wav", "a.wav")
	mustEqual(t, "recorded input", b.record()[0]["input"], any(filepath.Join(b.path("in"), "-b.wav")))
}

// TestStrangers: what stands under an output's name in a folder without a
// treatment record is somebody else's, unless --again says otherwise; with a
// record the folder is fettle's.
func TestStrangers(t *testing.T) {
	b := newBench(t)
	b.plain("a.wav")
	mustDo(t, os.MkdirAll(b.Out, 0o777), os.WriteFile(filepath.Join(b.Out, "a.wav"), []byte("precious"), 0o666))
	b.render(identityChain, b.path("a.wav")).must(t, exitNotStarted, "a.wav", "is there already", "--again")
	mustEqual(t, "the file", string(read(t, filepath.Join(b.Out, "a.wav"))), "precious")
	b.render(identityChain, "--again", b.path("a.wav")).must(t, exitDone)
	mustDo(t, os.WriteFile(filepath.Join(b.Out, "a.wav"), []byte("edited"), 0o666))
	b.render(identityChain, b.path("a.wav")).must(t, exitDone)
	mustEqual(t, "the output", string(read(t, filepath.Join(b.Out, "a.wav"))), string(read(t, b.path("a.wav"))))
}

// TestTreatedFolders: outputs of an earlier batch below the inputs are no inputs.
func TestTreatedFolders(t *testing.T) {
	b := newBench(t)
	b.plain("in/a.wav")
	fettle("render", "--chain", b.chain(identityChain), "--out", b.path("in/first"), b.path("in")).must(t, exitDone)
	b.render(identityChain, b.path("in")).must(t, exitDone)
	b.mustHold("a.wav")
}
