package batch

import (
	"bytes"
	"encoding/json"
	"errors"
	"fmt"
	"os"
	"sync"
	"time"

	"fettle/audio/container"
)

// RecordName is the treatment record's file name in the output folder. A shard
// has one of its own, see recordNameOf.
const RecordName = "treatment.jsonl"

// RecordSchema names the layout of a record's lines.
const RecordSchema = "fettle.treatment/1"

// What became of a recording.
const (
	StatusDone   = "done"
	StatusFailed = "failed"
)

// Entry is one line of the treatment record: what was done to one recording.
// Levels are null where there is none, as in silence; of a failed recording,
// what was not found out is empty, 0 or null.
type Entry struct {
	Schema  string `json:"schema"`
	Version string `json:"version"`
	Status  string `json:"status"`
	Error   string `json:"error"`

	Treated time.Time `json:"treated"` // when it was begun

	Input         name      `json:"input"`
	Output        name      `json:"output"` // below the output folder
	InputBytes    int64     `json:"input_bytes"`
	InputModified time.Time `json:"input_modified"`
	OutputBytes   int64     `json:"output_bytes"`
	SHA256In      string    `json:"sha256_in"`
	SHA256Out     string    `json:"sha256_out"`

	// Of what the chain took out, "" if that was not kept.
	Removed       name   `json:"removed"`
	SHA256Removed string `json:"sha256_removed"`

	RateHz   int   `json:"rate_hz"`
	Channels int   `json:"channels"`
	Frames   int64 `json:"frames"`
	// Of a trial, which stretch of the recording it is, in frames; null otherwise.
	TrialFrom *int64 `json:"trial_from"`
	TrialTo   *int64 `json:"trial_to"`
	FormatIn  string `json:"format_in"`
	FormatOut string `json:"format_out"`

	Chain           string  `json:"chain"`
	ChainSHA256     string  `json:"chain_sha256"`
	Settings        string  `json:"settings"`
	Phase           string  `json:"phase"`
	LatencySamples  float64 `json:"latency_samples"`
	ResidualSamples float64 `json:"residual_samples"`
	Edges           string  `json:"edges"`
	Kernel          string  `json:"kernel"`

	PeakIn               *float64 `json:"peak_in_dbfs"`
	TruePeakIn           *float64 `json:"true_peak_in_dbtp"`
	PeakOut              *float64 `json:"peak_out_dbfs"`
	TruePeakOut          *float64 `json:"true_peak_out_dbtp"`
	TruePeakOversampling int      `json:"true_peak_oversampling"`
	HeadroomDB           float64  `json:"headroom_db"` // taken off
	Dither               string   `json:"dither"`

	// Which part of which batch this is: "2/8", or "" for all of it.
	Shard      string `json:"shard"`
	Batch      string `json:"batch"`
	BatchCount int    `json:"batch_recordings"`

	// How many samples the output, read back, is off the place that the chain's
	// own response gives it, and half the width of that figure's 95 % interval; null
	// and a reason where the recording does not tell. All empty without proof.
	Alignment          *float64 `json:"alignment_samples"`
	AlignmentErr       *float64 `json:"alignment_samples_err"`
	AlignmentNotStated string   `json:"alignment_not_stated"`

	// What became of the original's chunks beside its sound.
	Kept      []container.Note `json:"chunks_kept"`
	Corrected []container.Note `json:"chunks_corrected"`
	Dropped   []container.Note `json:"chunks_dropped"`

	Warnings []string `json:"warnings"`
}

// record appends entries to the treatment record, each flushed to disk. Those
// that come while a flush is under way share the next one.
type record struct {
	mu       sync.Mutex
	flushed  *sync.Cond // broadcast after every flush
	file     *os.File
	flushing bool
	written  int   // entries
	safe     int   // of them, on disk
	err      error // of the first write or flush that failed; the record is unsure from there on
}

func openRecord(path string) (*record, error) {
	f, err := os.OpenFile(path, os.O_RDWR|os.O_APPEND|os.O_CREATE, 0o666)
	if err != nil {
		return nil, unwritableRecord(path, err)
	}
	if !alone(f) {
		return nil, errors.Join(fmt.Errorf("the treatment record %s: another run is writing to it; wait for that to end, or choose another folder for --out", path), f.Close())
	}
	if err := dropTorn(f); err != nil {
		return nil, errors.Join(unwritableRecord(path, err), f.Close())
	}
	r := &record{file: f}
	r.flushed = sync.NewCond(&r.mu)
	return r, nil
}

// dropTorn cuts a last line that a killed run left without its end.
func dropTorn(f *os.File) error {
	info, err := f.Stat()
	if err != nil {
		return err
	}
	end, b := info.Size(), make([]byte, 4096)
	for end > 0 {
		from := max(0, end-int64(len(b)))
		piece := b[:end-from]
		if _, err := f.ReadAt(piece, from); err != nil {
			return err
		}
		if i := bytes.LastIndexByte(piece, '\n'); i >= 0 {
			end = from + int64(i) + 1
			break
		}
		end = from
	}
	if end == info.Size() {
		return nil
	}
	return f.Truncate(end)
}

func (r *record) append(entries ...*Entry) error {
	lines, err := encode(entries)
	if err != nil {
		return err
	}
	r.mu.Lock()
	defer r.mu.Unlock()
	if r.err == nil {
		_, r.err = r.file.Write(lines)
	}
	r.written += len(entries)
	r.flush(r.written)
	if r.err != nil {
		return unwritableRecord(r.file.Name(), r.err)
	}
	return nil
}

// encode gives entries as they stand in a record, a line each.
func encode(entries []*Entry) ([]byte, error) {
	var lines bytes.Buffer
	enc := json.NewEncoder(&lines)
	enc.SetEscapeHTML(false)
	for _, e := range entries {
		if err := enc.Encode(e); err != nil {
			return nil, err
		}
	}
	return lines.Bytes(), nil
}

// flush returns once the first so many entries are on disk, or never will be.
func (r *record) flush(entries int) {
	for r.safe < entries && r.err == nil {
		if r.flushing {
			r.flushed.Wait()
			continue
		}
		r.flushing = true
		upTo := r.written
		r.mu.Unlock()
		err := r.file.Sync()
		r.mu.Lock()
		r.flushing = false
		if r.err == nil {
			r.err = err
		}
		if err == nil {
			r.safe = upTo
		}
		r.flushed.Broadcast()
	}
}

func unwritableRecord(path string, err error) error {
	return fmt.Errorf("the treatment record %s: cannot be written: %w; check the disk and its permissions", path, cause(err))
}

func unreadableRecord(path string, err error) error {
	return fmt.Errorf("the treatment record %s: cannot be read: %w; check its permissions, or move it away to begin a new one", path, cause(err))
}

func (r *record) close() error { return r.file.Close() }
