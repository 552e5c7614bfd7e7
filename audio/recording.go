package audio

import (
	"crypto/sha256"
	"errors"
	"fmt"
	"hash"
	"io"
	"io/fs"
	"os"
	"slices"
	"time"

	"fettle/audio/container"
	"fettle/audio/pcm"

	goaudio "github.com/go-audio/audio"
)

// bufferBytes is how much is read or written at once, whole frames of it.
const bufferBytes = 1 << 16

// Rates outside this range, in Hz, are worth a warning: they occur in damaged
// headers more often than in recordings (common practice, no source).
const (
	lowRate  = 8_000
	highRate = 384_000
)

// Recording is an open WAV file and the Source of its frames. Not for
// concurrent use.
type Recording struct {
	path     string
	file     *os.File
	size     int64
	modTime  time.Time
	layout   *container.Layout
	encoding pcm.Encoding
	format   goaudio.Format

	buffer []byte // taken at the first read
	rest   []byte // read from the file and not yet decoded
	next   int64  // byte in the file behind rest
	frame  int64  // next frame to hand out
	err    error  // ended the stream

	hash   hash.Hash
	hashed int64 // bytes of the file that hash has seen, from the start
}

// Open opens a WAV file for reading, be it RIFF, RF64, BW64 or RIFX: PCM of 4 to
// 32 bits in 1 to 4 bytes or IEEE float of 32 or 64, any rate and channel count,
// with a plain or an EXTENSIBLE fmt chunk. Errors begin with the path and unwrap to an error of
// the system, to [container.ErrMalformed] or to [container.ErrUnsupported].
func Open(path string) (*Recording, error) {
	// Looked at before it is opened: opening a pipe may wait for ever.
	if info, err := os.Stat(path); err == nil && !info.IsDir() && !info.Mode().IsRegular() {
		return nil, fmt.Errorf("%s: is not a regular file; copy the recording to one first", path)
	}
	file, err := os.Open(path)
	if err != nil {
		return nil, fmt.Errorf("%s: cannot be opened: %w; check the name and the permissions", path, bare(err))
	}
	r := &Recording{path: path, file: file, hash: sha256.New()}
	if err := r.open(); err != nil {
		file.Close()
		return nil, fmt.Errorf("%s: %w", path, err)
	}
	return r, nil
}

func (r *Recording) open() error {
	info, err := r.file.Stat()
	if err != nil {
		return fmt.Errorf("cannot be examined: %w; check the disk", bare(err))
	}
	if info.IsDir() {
		return errors.New("is a folder, not a recording; name a WAV file in it")
	}
	r.size, r.modTime = info.Size(), info.ModTime()
	if r.layout, err = container.Parse(r.file, r.size); err != nil {
		return err
	}
	f := r.layout.Format
	r.encoding = pcm.Encoding{Float: f.Float, Bytes: f.Bytes, Bits: f.ValidBits}
	r.format = goaudio.Format{NumChannels: f.Channels, SampleRate: f.Rate}
	return r.Rewind()
}

// bare takes the operation and the path off an error of package os: the text
// around it names them.
func bare(err error) error {
	var pathError *fs.PathError
	if errors.As(err, &pathError) {
		return pathError.Err
	}
	return err
}

// Format tells the rate in Hz and the number of channels.
func (r *Recording) Format() *goaudio.Format { return &r.format }

// Frames is the number of whole frames in the file.
func (r *Recording) Frames() int64 { return r.layout.Frames() }

// Encoding is how the file stores a sample.
func (r *Recording) Encoding() pcm.Encoding { return r.encoding }

// Layout is where everything in the file is; not to be changed.
func (r *Recording) Layout() *container.Layout { return r.layout }

// Size is the size of the whole file in bytes, when it was opened.
func (r *Recording) Size() int64 { return r.size }

// ModTime is when the file was last changed, when it was opened.
func (r *Recording) ModTime() time.Time { return r.modTime }

// Warnings are what was wrong with the file and could be put right, and what is
// unusual about it.
func (r *Recording) Warnings() []string {
	w := append([]string(nil), r.layout.Warnings...)
	if rate := r.format.SampleRate; rate < lowRate || rate > highRate {
		w = append(w, fmt.Sprintf("the sample rate is %d Hz, outside the usual %d to %d; used as it is", rate, lowRate, highRate))
	}
	return w
}

// Rewind makes the next frame the first one again. It also clears an error that
// ended the stream.
func (r *Recording) Rewind() error { return r.SeekFrame(0) }

// SeekFrame makes `frame`, 0 to Frames, the next one. It also clears an error
// that ended the stream.
func (r *Recording) SeekFrame(frame int64) error {
	if frame < 0 || frame > r.Frames() {
		return fmt.Errorf("%s: frame %d is none of its %d", r.path, frame, r.Frames())
	}
	r.frame, r.next = frame, r.layout.Data.Offset+frame*int64(r.layout.Format.FrameBytes())
	r.rest, r.err = nil, nil
	return nil
}

// Close closes the file.
func (r *Recording) Close() error {
	giveBuffer(r.buffer)
	r.buffer, r.rest = nil, nil
	return r.file.Close()
}

// ReadFrames reads as [Source] says. A NaN or an infinity in a float file ends
// the stream with an error, as does a file that has become shorter since it was
// opened. It panics unless len(dst) is a positive multiple of the channels.
func (r *Recording) ReadFrames(dst []float64) (int, error) {
	checkFrames(len(dst), r.format.NumChannels)
	if r.err != nil {
		return 0, r.err
	}
	want := int(min(int64(len(dst)/r.format.NumChannels), r.Frames()-r.frame))
	if want == 0 {
		return 0, io.EOF
	}
	dst = dst[:want*r.format.NumChannels]
	if r.err = r.decode(dst); r.err != nil {
		return 0, r.err
	}
	r.frame += int64(want)
	return want, nil
}

func (r *Recording) decode(dst []float64) error {
	for left := dst; len(left) > 0; {
		if len(r.rest) == 0 {
			if err := r.fill(); err != nil {
				return err
			}
		}
		n := min(len(left), len(r.rest)/r.encoding.Bytes)
		pcm.Decode(left[:n], r.rest[:n*r.encoding.Bytes], r.encoding)
		left, r.rest = left[n:], r.rest[n*r.encoding.Bytes:]
	}
	if !r.encoding.Float {
		return nil
	}
	if i := pcm.FirstNonFinite(dst); i >= 0 {
		channels := r.format.NumChannels
		return fmt.Errorf("%s: frame %d, channel %d: the sample is %v, which is no level; repair the recording or export it again",
			r.path, r.frame+int64(i/channels), i%channels+1, dst[i])
	}
	return nil
}

// fill reads the next bufferful of samples. The caller knows that there is one.
func (r *Recording) fill() error {
	if r.hashed == 0 {
		if err := r.hashUpTo(r.layout.Data.Offset); err != nil {
			return err
		}
	}
	if r.buffer == nil {
		r.buffer = takeBuffer(wholeFrames(r.layout.Format))
	}
	end := r.layout.Data.Offset + r.layout.Data.Size
	b := r.buffer[:min(int64(len(r.buffer)), end-r.next)]
	if err := r.readAt(b, r.next); err != nil {
		return err
	}
	r.addToHash(b, r.next)
	if r.layout.Form == container.RIFX {
		reverseSamples(b, r.encoding.Bytes)
	}
	r.next += int64(len(b))
	r.rest = b
	return nil
}

// wholeFrames is how many bytes of frames go through a buffer at once.
func wholeFrames(f container.Format) int {
	return max(1, bufferBytes/f.FrameBytes()) * f.FrameBytes()
}

// reverseSamples makes big-endian samples little-endian.
func reverseSamples(b []byte, size int) {
	for ; len(b) > 0; b = b[size:] {
		slices.Reverse(b[:size])
	}
}

// readAt fills b from byte `at` of the file.
func (r *Recording) readAt(b []byte, at int64) error {
	n, err := r.file.ReadAt(b, at)
	if n == len(b) {
		return nil
	}
	if err == io.EOF {
		return fmt.Errorf("%s: byte %d: the file ends here, it had %d bytes when it was opened; wait until nothing writes to it any more: %w", r.path, at+int64(n), r.size, io.ErrUnexpectedEOF)
	}
	return fmt.Errorf("%s: byte %d: cannot be read: %w; check the disk", r.path, at+int64(n), bare(err))
}
