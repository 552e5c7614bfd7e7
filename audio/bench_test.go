package audio

import (
	"io"
	"math"
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
