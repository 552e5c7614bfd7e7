package audio

import (
	"crypto/sha256"
	"encoding/hex"
	"errors"
	"fmt"
	"hash"
	"io"
	"io/fs"
	"os"
	"path/filepath"
	"syscall"

	"fettle/audio/container"
	"fettle/audio/pcm"

	"github.com/google/renameio/v2"
)

// Spec says what a [Writer] is to write.
type Spec struct {
	Rate     int // Hz
	Channels int
	Encoding pcm.Encoding
	// FmtChunk, if not nil, is written as it is; it must agree with the above.
	FmtChunk []byte
	// ChannelMask assigns loudspeakers where FmtChunk is nil; 0: as usual.
	ChannelMask uint32
	Frames      int64 // exactly so many will be written
	// Carriage is what goes over from the original, see [Recording.Carry]; nil:
	// no chunks but the samples'.
	Carriage *container.Carriage
	// Limit is the size in bytes beyond which the file is RF64; 0: 4 GiB.
	Limit int64
	// Proof, if not nil, looks at the whole file before it gets its name, after its
	// bytes were read back and compared with those sent. What it finds wrong makes
	// Commit fail.
	Proof  func(path string) error
	Dither []*pcm.Dither // nil, or an entry a channel, nil for none
	Mode   fs.FileMode   // permissions before the umask; 0: 0o644
}

// Outline is the file that a Writer of the Spec will write, but for the samples.
// It tells the file's size and form.
func (s Spec) Outline() (*container.Outline, error) {
	return container.Plan{Format: s.Format(), Fmt: s.FmtChunk, Frames: s.Frames, Carriage: s.Carriage, Limit: s.Limit}.Outline()
}

// defaultMode are the permissions of a file that everyone may read.
const defaultMode = 0o644

// Writer writes a WAV file as a Sink. Not for concurrent use.
type Writer struct {
	path      string
	spec      Spec
	outline   *container.Outline
	file      *renameio.PendingFile
	out       io.Writer // the file
	hash      hash.Hash
	sent      sections // the same bytes, for the proof
	readers   int      // goroutines that read them back
	sum       string   // set by Commit
	quantiser *pcm.Quantiser
	buffer    []byte
	used      int   // bytes of buffer that hold encoded frames
	frames    int64 // taken so far
	err       error // makes Commit fail
	done      bool  // committed or aborted
}

var errDone = errors.New("the output was already committed or aborted")

// Create begins a WAV file in a temporary file next to path, which must be in
// a folder that exists. What may stand under path is replaced at Commit. The
// original that a Carriage reads from must stay open until then.
func Create(path string, spec Spec) (*Writer, error) {
	quantiser, err := pcm.NewQuantiser(spec.Encoding, spec.Channels, spec.Dither)
	if err != nil {
		return nil, fmt.Errorf("%s: %w", path, err)
	}
	outline, err := spec.Outline()
	if err != nil {
		return nil, fmt.Errorf("%s: %w", path, err)
	}
	file, err := createTemporary(path, spec.Mode)
	if err != nil {
		return nil, err
	}
	w := &Writer{path: path, spec: spec, outline: outline, file: file, out: file, hash: sha256.New(), readers: 1, quantiser: quantiser,
		buffer: takeBuffer(wholeFrames(spec.Format()))}
	if err := outline.WriteHead(putter{w}); err != nil {
		return nil, w.abandon(err)
	}
	return w, nil
}

// Format is what the Spec says of the samples, for [Recording.Carry] too.
func (s Spec) Format() container.Format {
	return container.Format{Float: s.Encoding.Float, Channels: s.Channels, Rate: s.Rate,
		Bytes: s.Encoding.Bytes, ValidBits: s.Encoding.Bits, ChannelMask: s.ChannelMask}
}

func createTemporary(path string, mode fs.FileMode) (*renameio.PendingFile, error) {
	if info, err := os.Stat(path); err == nil && info.IsDir() {
		return nil, fmt.Errorf("%s: is a folder; choose another name for the output", path)
	}
	if mode == 0 {
		mode = defaultMode
	}
	folder := filepath.Dir(path)
	file, err := renameio.NewPendingFile(path, renameio.WithTempDir(folder), renameio.WithPermissions(mode.Perm()))
	if err != nil {
		return nil, fmt.Errorf("%s: cannot be created in folder %s: %w; make the folder, or choose one that can be written to", path, folder, bare(err))
	}
	return file, nil
}

// put appends bytes to the file and the hash.
func (w *Writer) put(b []byte) error {
	if _, err := w.out.Write(b); err != nil {
		return fmt.Errorf("%s: cannot be written: %w; free space, or choose another folder", w.path, bare(err))
	}
	w.hash.Write(b) // never fails
	if w.spec.Proof != nil {
		w.sent.Write(b)
	}
	return nil
}

// putter is what the outline writes itself to.
type putter struct{ w *Writer }

func (p putter) Write(b []byte) (int, error) {
	if err := p.w.put(b); err != nil {
		return 0, err
	}
	return len(b), nil
}

// WriteFrames quantises frames and appends them. Samples beyond an integer
// format's range do not stop it, so that the whole recording's peak becomes
// known; Commit then fails. Anything else that goes wrong is returned here and
// again by Commit. It panics unless len(src) is a multiple of the channels.
func (w *Writer) WriteFrames(src []float64) error {
	switch {
	case len(src)%w.spec.Channels != 0:
		panic(fmt.Sprintf("audio: %d samples are no whole frames of %d channels", len(src), w.spec.Channels))
	case w.err != nil:
		return w.err
	case w.done:
		return errDone
	}
	w.frames += int64(len(src) / w.spec.Channels)
	if w.frames > w.spec.Frames {
		w.err = fmt.Errorf("%s: more than the %d frames that were announced; nothing was written", w.path, w.spec.Frames)
		return w.err
	}
	w.err = w.encode(src)
	return w.err
}

func (w *Writer) encode(src []float64) error {
	size := w.spec.Encoding.Bytes
	for len(src) > 0 {
		n := min(len(src), (len(w.buffer)-w.used)/size)
		end := w.used + n*size
		if err := w.quantiser.Encode(w.buffer[w.used:end], src[:n]); err != nil {
			return fmt.Errorf("%s: %w", w.path, err)
		}
		src, w.used = src[n:], end
		if w.used == len(w.buffer) {
			if err := w.flush(); err != nil {
				return err
			}
		}
	}
	return nil
}

func (w *Writer) flush() error {
	b := w.buffer[:w.used]
	w.used = 0
	return w.put(b)
}

// Commit finishes the file, syncs it, renames it to its path and syncs the
// folder. If anything has failed, if the number of frames is not the announced
// one, or if samples exceed the format ([*OverError]), it removes everything
// instead and says why.
func (w *Writer) Commit() error {
	if w.done {
		if w.err != nil {
			return w.err
		}
		return errDone
	}
	if err := w.finish(); err != nil {
		w.err = err
		return w.abandon(err)
	}
	w.end()
	return syncFolder(w.path)
}

func (w *Writer) finish() error {
	if w.err != nil {
		return w.err
	}
	if w.frames != w.spec.Frames {
		return fmt.Errorf("%s: %d frames where %d were announced; nothing was written", w.path, w.frames, w.spec.Frames)
	}
	if err := w.overs(); err != nil {
		return err
	}
	if err := w.flush(); err != nil {
		return err
	}
	if err := w.outline.WriteTail(putter{w}); err != nil {
		return err
	}
	w.sum = hex.EncodeToString(w.hash.Sum(nil))
	if err := w.prove(); err != nil {
		return fmt.Errorf("%s: %w", w.path, err)
	}
	if err := w.file.CloseAtomicallyReplace(); err != nil {
		return fmt.Errorf("%s: cannot be put in place: %w; check the disk and the folder", w.path, err)
	}
	return nil
}

// Readers sets how many goroutines may read the file back at once for the proof, 1
// or more; without it, it is one.
func (w *Writer) Readers(n int) { w.readers = n }

// prove reads the file back.
func (w *Writer) prove() error {
	if w.spec.Proof == nil {
		return nil
	}
	if err := w.sent.readBack(w.file.Name(), w.readers, w.buffer); err != nil {
		return err
	}
	return w.spec.Proof(w.file.Name())
}

func (w *Writer) overs() error {
	if w.quantiser.Overs() == 0 {
		return nil
	}
	frame, channel := w.quantiser.FirstOver()
	return &OverError{Path: w.path, Peak: DB(w.quantiser.OverPeak()), HeadroomDB: w.quantiser.HeadroomDB(),
		Count: w.quantiser.Overs(), Frame: frame, Channel: channel}
}

// syncFolder makes a rename outlast a crash. Some file systems cannot sync a
// folder and say EINVAL; there is nothing more to be done on those.
func syncFolder(path string) error {
	folder, err := os.Open(filepath.Dir(path))
	if err != nil {
		return fmt.Errorf("%s: its folder cannot be synced: %w; check the disk", path, bare(err))
	}
	defer folder.Close()
	if err := folder.Sync(); err != nil && !errors.Is(err, syscall.EINVAL) {
		return fmt.Errorf("%s: its folder cannot be synced: %w; check the disk", path, bare(err))
	}
	return nil
}

// Abort removes what was written. It does nothing after Commit or Abort.
func (w *Writer) Abort() error {
	if w.done {
		return nil
	}
	w.end()
	if err := w.file.Cleanup(); err != nil {
		return fmt.Errorf("%s: its temporary file cannot be removed: %w; remove it by hand", w.path, err)
	}
	return nil
}

// end is once the file is written, or given up.
func (w *Writer) end() {
	w.done = true
	giveBuffer(w.buffer)
	w.buffer = nil
}

// abandon aborts because of err, and returns it.
func (w *Writer) abandon(err error) error {
	if failed := w.Abort(); failed != nil {
		return errors.Join(err, failed)
	}
	return err
}

// SHA256 is the hash of the whole file in lower-case hexadecimal, after a
// successful Commit; before that it is empty.
func (w *Writer) SHA256() string { return w.sum }
