package probe

import (
	"context"
	"fmt"
	"io"

	"fettle/audio"
	"fettle/audio/container"
	"fettle/audio/pcm"
)

// Write writes a probe to a file with its parameters in it, with dither where the
// format rounds, unless the probe's own serves. It replaces what stands there. Errors
// are those of writing and of ctx.
func (p Parameters) Write(ctx context.Context, path string, to pcm.Encoding) error {
	spec := audio.Spec{Rate: p.Rate, Channels: p.Channels, Encoding: to, Frames: p.Frames(),
		Carriage: container.Fresh(ChunkID, p.Encode())}
	if !to.Float && (p.Dither == 0 || p.Dither > to.Bits) {
		spec.Dither = Dithers(p.Channels, string(p.Encode()))
	}
	w, err := audio.Create(path, spec)
	if err != nil {
		return err
	}
	defer w.Abort()
	if err := Copy(ctx, w, p.Source()); err != nil {
		return err
	}
	return w.Commit()
}

// Dithers makes dither for so many channels of what is called name.
func Dithers(channels int, name string) []*pcm.Dither {
	var out []*pcm.Dither
	for c := range channels {
		out = append(out, pcm.NewDither([32]byte{}, name, c))
	}
	return out
}

// Copy sends all of src to w.
func Copy(ctx context.Context, w audio.Sink, src audio.Source) error {
	channels := src.Format().NumChannels
	for buf := make([]float64, 16384*channels); ; {
		n, err := src.ReadFrames(buf)
		if err == io.EOF {
			return nil
		}
		if err == nil {
			err = w.WriteFrames(buf[:n*channels])
		}
		if err == nil {
			err = ctx.Err()
		}
		if err != nil {
			return err
		}
	}
}

// Of reads the parameters out of a probe file. Errors unwrap to ErrNoProbe, or are of
// reading.
func Of(file *audio.Recording) (Parameters, error) {
	chunk, err := file.Chunk(ChunkID, mostBytes)
	switch {
	case err != nil:
		return Parameters{}, err
	case chunk == nil:
		return Parameters{}, fmt.Errorf("%w: there is no chunk %q; name the file that fettle probe made, unchanged", ErrNoProbe, ChunkID)
	}
	return Decode(chunk)
}
