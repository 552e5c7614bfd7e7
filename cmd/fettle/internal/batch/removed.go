package batch

import (
	"errors"
	"fmt"
	"os"
	"path/filepath"

	"fettle/audio"
	"fettle/audio/pcm"
)

// removedEncoding holds what a chain takes out whatever its level, unrounded for
// all that ears can tell.
var removedEncoding = pcm.Encoding{Float: true, Bytes: 4, Bits: 32}

// removedMark is the file that marks a folder for what is removed as fettle's, as a
// record does an output folder.
const removedMark = "treatment.removed.txt"

func holdsRemoved(folder string) bool { return isThere(filepath.Join(folder, removedMark)) }

func (p *Plan) markRemoved() error {
	path := filepath.Join(p.Options.Removed, removedMark)
	text := fmt.Sprintf("What chains took out of recordings. The treatment record is in %s.\n", absolute(p.Options.Out))
	if err := os.WriteFile(path, []byte(text), 0o666); err != nil {
		return fmt.Errorf("%s: cannot be written: %w; choose another folder for --removed", path, cause(err))
	}
	return nil
}

// removal writes what the chain takes out of a recording: the original less the
// output, which can be because they are aligned.
type removal struct {
	path     string
	from     string           // path of the original
	original *audio.Recording // opened anew: it is read in step with the output
	section  *section
	writer   *audio.Writer
	buffer   []float64
}

func newRemoval(path, original string, from, to int64) (*removal, error) {
	rec, err := audio.Open(original)
	if err != nil {
		return nil, err
	}
	r := &removal{path: path, from: original, original: rec}
	format := rec.Format()
	r.section, err = newSection(rec, from, to)
	if err == nil {
		r.writer, err = createIn(path, "--removed", audio.Spec{Rate: format.SampleRate, Channels: format.NumChannels, Encoding: removedEncoding, Frames: to - from, Mode: 0o666})
	}
	if err != nil {
		return nil, errors.Join(err, rec.Close())
	}
	return r, nil
}

// add takes in frames of the output, which are scaled by gain.
func (r *removal) add(output []float64, gain float64) error {
	r.buffer = append(r.buffer[:0], output...)
	channels := r.section.Format().NumChannels
	for done := 0; done < len(output); {
		n, err := r.section.ReadFrames(r.buffer[done:])
		if err != nil {
			return fmt.Errorf("%s: cannot be read again for what is removed: %w", r.from, err)
		}
		done += n * channels
	}
	for i, y := range output {
		r.buffer[i] = gain*r.buffer[i] - y
	}
	return r.writer.WriteFrames(r.buffer)
}

func (r *removal) abort() error { return errors.Join(r.writer.Abort(), r.original.Close()) }

func (r *removal) commit(e *Entry) error {
	err := errors.Join(r.writer.Commit(), r.original.Close())
	if err == nil {
		e.Removed, e.SHA256Removed = name(absolute(r.path)), r.writer.SHA256()
	}
	return err
}
