package batch

import (
	"context"
	"encoding/binary"
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"sync"
	"testing"
	"time"

	"fettle/audio"
	"fettle/audio/pcm"
	"fettle/filter/stream/machine"
)

// flowChains go through slabs that are independent, that are not, and that are in
// part.
var flowChains = map[string]string{
	"kernel":    "phase: linear\nedges: mirror\nstages:\n  - lowpass: {pass: 2 kHz, stop: 2.2 kHz, reject: 60 dB, family: kaiser}\n",
	"recursive": "stages:\n  - highpass: {at: 100 Hz, order: 4}\n",
	"both":      "stages:\n  - highpass: {at: 100 Hz, order: 4}\n  - lowpass: {pass: 2 kHz, stop: 2.2 kHz, reject: 60 dB, family: kaiser, phase: linear, channels: [2]}\n",
}

// flowFrames gives five workers some slabs each.
const flowFrames = 5*share + 321

// stereoNoise writes noise in stereo, 32-bit float, with one frame set to a value.
func stereoNoise(t *testing.T, path string, at int, value float64) {
	t.Helper()
	mustDo(t, os.MkdirAll(filepath.Dir(path), 0o777))
	w, err := audio.Create(path, audio.Spec{Rate: 8000, Channels: 2, Encoding: pcm.Encoding{Float: true, Bytes: 4, Bits: 32}, Frames: flowFrames})
	mustDo(t, err)
	r := rand.New(rand.NewPCG(61, 62))
	x := make([]float64, 2*flowFrames)
	for i := range x {
		x[i] = 0.5 * (2*r.Float64() - 1)
	}
	mustDo(t, w.WriteFrames(x), w.Commit())
	f, err := os.OpenFile(path, os.O_RDWR, 0)
	mustDo(t, err)
	info, err := f.Stat()
	mustDo(t, err)
	_, err = f.WriteAt(binary.LittleEndian.AppendUint32(nil, math.Float32bits(float32(value))), info.Size()-int64(8*(flowFrames-at)))
	mustDo(t, err, f.Close())
}

// flowed renders what is in a folder on so many cores and gives its entry and its
// output's bytes, "" for none.
func flowed(t *testing.T, chain, in string, o Options) (*Entry, string) {
	t.Helper()
	o.Out, o.Jobs, o.Kernel = filepath.Join(t.TempDir(), "out"), 1, machine.Best()
	p, err := New(parse(t, chain), []string{in}, o)
	mustDo(t, err, p.PrepareOut())
	_, err = p.Run(context.Background(), &watcher{})
	mustDo(t, err)
	past, err := readRecord(p.recordPath())
	mustDo(t, err)
	e := past["a.wav"]
	e.Treated = time.Time{}
	e.Error = strings.ReplaceAll(e.Error, o.Out, "OUT")
	b, err := os.ReadFile(filepath.Join(o.Out, "a.wav"))
	if err != nil && !errors.Is(err, os.ErrNotExist) {
		t.Fatal(err)
	}
	return e, string(b)
}

// TestCoresDoNotMatter: output and record are the same on any number of cores, and so
// is what is said of a recording that fails.
func TestCoresDoNotMatter(t *testing.T) {
	encoding := pcm.Encoding{Bytes: 2, Bits: 16}
	for fault, value := range map[string]float64{"": 0.1, "a NaN": math.NaN(), "an over": 30} {
		in := filepath.Join(t.TempDir(), "in")
		stereoNoise(t, filepath.Join(in, "a.wav"), flowFrames/2, value)
		for name, chain := range flowChains {
			want, bytes := flowed(t, chain, in, Options{Cores: 1, Encoding: &encoding})
			if (fault == "") != (want.Status == StatusDone) || (fault == "") != (bytes != "") {
				t.Fatalf("%s, %s: %s, %s, %d bytes", name, fault, want.Status, want.Error, len(bytes))
			}
			for _, cores := range []int{2, 5} {
				got, b := flowed(t, chain, in, Options{Cores: cores, Encoding: &encoding})
				if b != bytes {
					t.Errorf("%s, %s, %d cores: the output differs", name, fault, cores)
				}
				if g, w := fmt.Sprint(lines(t, got)), fmt.Sprint(lines(t, want)); g != w {
					t.Errorf("%s, %s, %d cores:\n%s\nwant\n%s", name, fault, cores, g, w)
				}
			}
		}
	}
}

func lines(t *testing.T, e *Entry) string {
	t.Helper()
	b, err := encode([]*Entry{e})
	mustDo(t, err)
	return string(b)
}

// TestInterruptedInARecording: of one that many cores were at, nothing is left.
func TestInterruptedInARecording(t *testing.T) {
	in, out := filepath.Join(t.TempDir(), "in"), filepath.Join(t.TempDir(), "out")
	stereoNoise(t, filepath.Join(in, "a.wav"), 0, 0)
	for name, chain := range flowChains {
		p, err := New(parse(t, chain), []string{in}, Options{Out: out, Jobs: 1, Cores: 3})
		mustDo(t, err, p.PrepareOut())
		ctx, cancel := context.WithCancel(context.Background())
		s, err := p.Run(ctx, interrupter{cancel})
		if !errors.Is(err, context.Canceled) || s.Left != 1 {
			t.Errorf("%s: %+v, error %v", name, s, err)
		}
		if left := files(t, out); len(left) != 0 {
			t.Errorf("%s: %q are left", name, left)
		}
	}
}

// interrupter cancels when it hears of the first bytes.
type interrupter struct{ cancel func() }

func (i interrupter) Bytes(int64)          { i.cancel() }
func (i interrupter) Finished(*Job, error) {}

// TestQueue: numbers pass in their order, one at a time, however they come and however
// long each takes.
func TestQueue(t *testing.T) {
	const numbers = 60
	q := newQueue()
	var passed []int64
	var all sync.WaitGroup
	for _, n := range rand.New(rand.NewPCG(63, 64)).Perm(numbers) {
		all.Go(func() {
			q.await(int64(n))
			passed = append(passed, int64(n))
			if n%10 == 0 {
				time.Sleep(time.Millisecond) // longer than any patience
			}
			q.next()
		})
	}
	all.Wait()
	if len(passed) != numbers || !slices.IsSorted(passed) {
		t.Errorf("passed in the order %v", passed)
	}
}
