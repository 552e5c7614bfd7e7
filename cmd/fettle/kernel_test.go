package main

import (
	"math"
	"os"
	"path/filepath"
	"testing"

	"fettle/audio/needs"
	"fettle/filter/stream/machine"
)

// linearChain is one kernel of some hundred taps.
const linearChain = "phase: linear\n" + filterChain

// TestKernelIsNamed by flag or by the environment; outputs of two kernels differ
// by rounding only.
func TestKernelIsNamed(t *testing.T) {
	var outputs [][]float64
	for _, k := range machine.Available() {
		for _, by := range []string{"flag", "environment"} {
			b := newBench(t)
			b.recording("a.wav", "pcm24", rate, 2, noise(60_000, 7))
			args := []string{"--format", "float64", b.path("a.wav")}
			if by == "flag" {
				args = append(args, "--kernel", k.String())
			} else {
				t.Setenv(kernelVariable, k.String())
			}
			b.render(linearChain, args...).must(t, exitDone)
			os.Unsetenv(kernelVariable)
			mustEqual(t, "kernel", b.last()["kernel"], any(k.String()))
			outputs = append(outputs, samples(t, filepath.Join(b.Out, "a.wav")))
		}
	}
	for i, y := range outputs {
		worst := 0.0
		for n := range y {
			worst = max(worst, math.Abs(y[n]-outputs[0][n]))
		}
		if i == 1 && worst != 0 {
			t.Errorf("one kernel named in two ways gives outputs that differ by %g", worst)
		}
		if !(worst <= 1e-13) {
			t.Errorf("output %d differs from the first by %g", i, worst)
		}
	}
}

func TestUnknownKernel(t *testing.T) {
	b := newBench(t)
	b.plain("a.wav")
	b.render(identityChain, "--kernel", "sse9", b.path("a.wav")).must(t, exitNotStarted, "--kernel", `"sse9"`, "portable")
	fettle("audit", "chain", "--kernel", "sse9", b.chain(identityChain)).must(t, exitNotStarted, "--kernel", `"sse9"`)
}

// TestOtherKernelThanTheRecord: a batch does not go on with another kernel
// unless it is told to.
func TestOtherKernelThanTheRecord(t *testing.T) {
	other := machine.Available()[len(machine.Available())-1].String()
	if other == "portable" {
		needs.Missing(t, "missing: a processor with AVX2 and FMA, for a second kernel")
	}
	start := func() *bench {
		b := newBench(t)
		b.plain("in/a.wav")
		b.render(linearChain, "--kernel", "portable", b.path("in")).must(t, exitDone)
		return b
	}
	b := start()
	b.render(linearChain, b.path("in")).must(t, exitDone) // nothing is left to do
	b.plain("in/b.wav")
	b.render(linearChain, b.path("in")).must(t, exitNotStarted, "a.wav was made with kernel portable", "--kernel portable", "--again")
	mustEqual(t, "entries after the refusal", len(b.record()), 1)
	b.render(linearChain, "--kernel", "portable", b.path("in")).must(t, exitDone)
	mustEqual(t, "kernel as before", b.last()["kernel"], any("portable"))

	b = start()
	b.plain("in/b.wav")
	b.render(linearChain, "--kernel", other, b.path("in")).must(t, exitDone)
	mustEqual(t, "kernel of the mix", b.last()["kernel"], any(other))

	b = start()
	b.plain("in/b.wav")
	b.render(linearChain, "--again", b.path("in")).must(t, exitDone)
	for _, e := range b.record()[1:] {
		mustEqual(t, "kernel of all anew", e["kernel"], any(other))
	}
}
