package audio

import (
	"io"
	"math"
	"math/rand/v2"
	"path/filepath"
	"testing"

	"fettle/audio/pcm"
)

const (
	benchFrames = 1 << 20
	benchBuffer = 4096 // frames a call
)

var benchEncodings = []pcm.Encoding{
	{Bytes: 2, Bits: 16}, {Bytes: 3, Bits: 24}, {Float: true, Bytes: 4, Bits: 32},
}

func reportSamples(b *testing.B, each int) {
	b.ReportMetric(float64(b.N)*float64(each)/b.Elapsed().Seconds(), "smp/s")
}

// BenchmarkRead opens a stereo file that is in the page cache, and reads it to
// the end; hashed=true is a first pass, hashed=false a later one.
func BenchmarkRead(b *testing.B) {
	for _, e := range benchEncodings {
		path := filepath.Join(b.TempDir(), "a.wav")
		writeAll(b, path, Spec{Rate: 48000, Channels: 2, Encoding: e, Frames: benchFrames}, ramp(2*benchFrames))
		b.Run(e.String()+"/hashed=true", func(b *testing.B) {
			for b.Loop() {
				r := mustOpen(b, path)
				drain(b, r)
				r.Close()
			}
			reportSamples(b, 2*benchFrames)
		})
		b.Run(e.String()+"/hashed=false", func(b *testing.B) {
			r := mustOpen(b, path)
			drain(b, r)
			for b.Loop() {
				if err := r.Rewind(); err != nil {
					b.Fatal(err)
				}
				drain(b, r)
			}
			reportSamples(b, 2*benchFrames)
		})
	}
}

func drain(b *testing.B, s Source) {
	buffer := make([]float64, benchBuffer*s.Format().NumChannels)
	for {
		if _, err := s.ReadFrames(buffer); err == io.EOF {
			return
		} else if err != nil {
			b.Fatal(err)
		}
	}
}

// BenchmarkWrite quantises, hashes and writes, the file's sync and renaming
// left out: they measure the disk.
func BenchmarkWrite(b *testing.B) {
	for _, e := range benchEncodings {
		for _, dithered := range []bool{false, true} {
			if dithered && e.Float {
				continue
			}
			name := e.String() + "/dither=false"
			var dither []*pcm.Dither
			if dithered {
				name = e.String() + "/dither=true"
				dither = []*pcm.Dither{pcm.NewDither([32]byte{}, "a.wav", 0), pcm.NewDither([32]byte{}, "a.wav", 1)}
			}
			b.Run(name, func(b *testing.B) {
				benchWrite(b, Spec{Rate: 48000, Channels: 2, Encoding: e, Frames: math.MaxInt32 / 8, Dither: dither})
			})
		}
	}
}

func benchWrite(b *testing.B, spec Spec) {
	w, err := Create(filepath.Join(b.TempDir(), "a.wav"), spec)
	if err != nil {
		b.Fatal(err)
	}
	defer w.Abort()
	frames := ramp(2 * benchBuffer)
	for b.Loop() {
		w.frames = 0 // as long as the benchmark likes
		if _, err := w.file.Seek(0, io.SeekStart); err != nil {
			b.Fatal(err)
		}
		if err := w.WriteFrames(frames); err != nil {
			b.Fatal(err)
		}
	}
	reportSamples(b, 2*benchBuffer)
}

// BenchmarkMeter: the same in both channels, with the peak that it sets itself.
// Noise, speech and a low tone spare the interpolator most of the time though they
// are loud; a steady tone of a fifth to a third of the rate hardly ever does, which
// is the worst case, and material 8 dB or more below a peak always.
func BenchmarkMeter(b *testing.B) {
	const frames = 1 << 15
	tone := func(f float64) []float64 { return sine(frames, math.Round(f*frames)/frames, 1) } // in whole cycles
	bursts, quiet := tone(0.11), sine(frames, 0.11, 0.4)
	for i := range bursts {
		bursts[i] *= math.Pow(math.Sin(math.Pi*float64(i)/1024), 8)
	}
	copy(quiet, []float64{1, -1})
	for _, s := range []struct {
		name string
		x    []float64
	}{
		{"low tone", tone(0.02)}, {"tone", tone(0.11)}, {"worst tone", tone(0.29)},
		{"noise", noise(frames)}, {"speech", speechLike(frames)}, {"bursts", bursts}, {"quiet", quiet},
	} {
		x := interleave([][]float64{s.x, s.x})
		b.Run(s.name, func(b *testing.B) {
			m := metered(x, 2)
			for b.Loop() {
				m.Add(x)
			}
			reportSamples(b, len(x))
		})
	}
}

// noise is white, uniform up to full scale.
func noise(n int) []float64 {
	r := rand.New(rand.NewPCG(1, 2))
	x := make([]float64, n)
	for i := range x {
		x[i] = 2*r.Float64() - 1
	}
	return x
}

// speechLike is noise through a resonance at a twentieth of the rate, in
// syllables, its peak at full scale.
func speechLike(n int) []float64 {
	x := noise(n)
	var y1, y2 float64
	for i := range x {
		y1, y2 = x[i]+1.6*y1-0.7*y2, y1
		x[i] = y1 * math.Pow(math.Sin(math.Pi*float64(i)/8192), 2)
	}
	peak := largest(x)
	for i := range x {
		x[i] /= peak
	}
	return x
}
