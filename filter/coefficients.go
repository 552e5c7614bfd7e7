package filter

import (
	"bytes"
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"math"
	"path/filepath"
	"strconv"
	"strings"

	"fettle/audio"
	"fettle/filter/design"
	"fettle/filter/response"

	"github.com/goccy/go-yaml/ast"
)

// formats reads coefficients from the bytes of a text or JSON file, or from a
// recording; nil where these do not come so. An error names the line, if any,
// but not the file.
type formats[T any] struct {
	text, json func(raw []byte) (T, error)
	wav        func(r *audio.Recording) (T, error)
}

// maxFile in bytes bounds a coefficient file: design.MaxTaps numbers of
// seventeen digits take less than half of it.
const maxFile = 256 << 20

// coefficientFile reads the key 'file'; path is relative to the chain's file.
func (c *Chain) coefficientFile(f *fields) (n ast.Node, path string) {
	n = f.need("file", "taps.txt")
	path = f.d.text(n, "file")
	switch {
	case path == "":
		f.d.fail(n, "'file' is an empty text; it names a file beside the chain")
	case !filepath.IsAbs(path):
		path = filepath.Join(filepath.Dir(c.File), path)
	}
	return n, path
}

// readFile reads coefficients by the file's ending and takes the file into the
// chain's hash.
func readFile[T any](c *Chain, d *decoder, n ast.Node, path string, as formats[T]) (out T) {
	if d.err != nil {
		return out
	}
	var digest []byte
	var err error
	switch ending := strings.ToLower(filepath.Ext(path)); {
	case ending == ".wav" && as.wav == nil:
		d.fail(n, "'file' is %s; these coefficients come from text or JSON", describe(n))
		return out
	case ending == ".wav":
		out, digest, err = fromRecording(path, as.wav)
	case ending == ".json":
		out, digest, err = fromBytes(path, as.json)
	default:
		out, digest, err = fromBytes(path, as.text)
	}
	switch {
	case errors.Is(err, fs.ErrNotExist):
		d.fail(n, "'file': %s: there is no such file; a relative name counts from the chain's own folder", path)
	case err != nil:
		d.fail(n, "'file': %v", err)
	}
	c.digests = append(c.digests, digest...)
	return out
}

func fromBytes[T any](path string, read func([]byte) (T, error)) (out T, digest []byte, err error) {
	raw, err := readAtMost(path, maxFile)
	if err != nil {
		return out, nil, err
	}
	sum := sha256.Sum256(raw)
	if out, err = read(bytes.TrimPrefix(raw, []byte("\ufeff"))); err != nil {
		var at *lineError
		if errors.As(err, &at) {
			return out, nil, fmt.Errorf("%s:%d: %s", path, at.line, at.msg)
		}
		return out, nil, fmt.Errorf("%s: %w", path, err)
	}
	return out, sum[:], nil
}

func fromRecording[T any](path string, read func(*audio.Recording) (T, error)) (out T, digest []byte, err error) {
	r, err := audio.Open(path)
	if err != nil {
		return out, nil, err
	}
	defer r.Close()
	if out, err = read(r); err != nil {
		return out, nil, fmt.Errorf("%s: %w", path, err)
	}
	sum, err := r.SHA256()
	if err != nil {
		return out, nil, err
	}
	digest, err = hex.DecodeString(sum)
	return out, digest, err
}

// madeAt is the sample rate in Hz that coefficients were made for; 0: they say nothing.
type madeAt int

// check refuses another rate.
func (m madeAt) check(rate float64) error {
	if m != 0 && rate != ampleRate && rate != float64(m) {
		return fmt.Errorf("its file was made for %d Hz, and at %g Hz is another filter; give one for that rate, or add when: rate == %d Hz", m, rate, m)
	}
	return nil
}

// rateRemark begins the remark by which a text of coefficients tells its rate.
const rateRemark = "# rate_hz "

// noting reads coefficients, and notes the rate that their file tells: a text in a remark,
// JSON under the key rate_hz, both as Export writes them.
func noting[T any](made *madeAt, read func([]byte) (T, error)) func([]byte) (T, error) {
	return func(raw []byte) (T, error) {
		var object struct {
			Rate int `json:"rate_hz"`
		}
		if json.Unmarshal(raw, &object) == nil {
			*made = madeAt(object.Rate)
		}
		for line := range strings.Lines(string(raw)) {
			if !strings.HasPrefix(line, "#") {
				break // remarks stand first
			}
			if text, ok := strings.CutPrefix(line, rateRemark); ok {
				if n, err := strconv.Atoi(strings.TrimSpace(text)); err == nil && n > 0 {
					*made = madeAt(n)
				}
			}
		}
		return read(raw)
	}
}

// lineError is what is wrong in a line of a coefficient file.
type lineError struct {
	line int // from 1
	msg  string
}

func (e *lineError) Error() string { return fmt.Sprintf("line %d: %s", e.line, e.msg) }

// eachRow takes lines of numbers, parted by blanks, commas or semicolons; what
// follows # is a remark. Lines without numbers are passed by.
func eachRow(raw []byte, take func(row []float64) error) error {
	line := 0
	for text := range strings.Lines(string(raw)) {
		line++
		text, _, _ = strings.Cut(text, "#")
		var row []float64
		for _, word := range strings.FieldsFunc(text, func(r rune) bool { return strings.ContainsRune(" \t\r\n,;", r) }) {
			v, err := strconv.ParseFloat(word, 64)
			if err != nil || math.IsNaN(v) || math.IsInf(v, 0) {
				return &lineError{line, quote(word) + " is not a finite number"}
			}
			row = append(row, v)
		}
		if row == nil {
			continue
		}
		if err := take(row); err != nil {
			return &lineError{line, err.Error()}
		}
	}
	return nil
}

// rowsRemark heads the rows of a text of biquads.
const rowsRemark = "b0 b1 b2 a0 a1 a2"

func tapsFromText(raw []byte) (taps []float64, err error) {
	if bytes.Contains(raw, []byte("# "+rowsRemark+"\n")) {
		return nil, errors.New("holds biquads, not taps; read it by the stage biquads")
	}
	err = eachRow(raw, func(row []float64) error {
		taps = append(taps, row...)
		return nil
	})
	return taps, err
}

func sectionsFromText(raw []byte) (sections []response.Section, err error) {
	err = eachRow(raw, func(row []float64) error {
		s, err := sectionOf(row)
		if err != nil {
			return fmt.Errorf("the section %w", err)
		}
		sections = append(sections, s)
		return nil
	})
	return sections, err
}

// jsonNumbers is an array of JSON numbers; null would read as 0 in a plain one.
type jsonNumbers []*float64

func (n jsonNumbers) values() ([]float64, error) {
	out := make([]float64, len(n))
	for i, v := range n {
		if v == nil {
			return nil, fmt.Errorf("value %d of a list is null; write a number", i+1)
		}
		out[i] = *v
	}
	return out, nil
}

func tapsFromJSON(raw []byte) ([]float64, error) {
	numbers, err := fromJSON[jsonNumbers](raw, "taps", "[0.25, 0.5, 0.25]")
	if err != nil {
		return nil, err
	}
	return numbers.values()
}

func sectionsFromJSON(raw []byte) ([]response.Section, error) {
	rows, err := fromJSON[[]jsonNumbers](raw, "sections", "[[b0, b1, b2, a0, a1, a2]]")
	if err != nil {
		return nil, err
	}
	sections := make([]response.Section, len(rows))
	for i, row := range rows {
		numbers, err := row.values()
		if err != nil {
			return nil, fmt.Errorf("section %d: %w", i+1, err)
		}
		if sections[i], err = sectionOf(numbers); err != nil {
			return nil, fmt.Errorf("section %d %w", i+1, err)
		}
	}
	return sections, nil
}

// fromJSON reads a bare array, or an object with the array under a key; what
// else the object holds is no matter. shape is such an array, for errors.
func fromJSON[T any](raw []byte, key, shape string) (out T, err error) {
	array, base := raw, 0
	if bytes.HasPrefix(bytes.TrimLeft(raw, " \t\r\n"), []byte("{")) {
		var object map[string]json.RawMessage
		if err := json.Unmarshal(raw, &object); err != nil {
			return out, jsonError(raw, 0, err, shape)
		}
		array = object[key]
		if array == nil {
			return out, fmt.Errorf("has no key %q; write %s or {%q: %s}", key, shape, key, shape)
		}
		base = bytes.Index(raw, array)
	}
	err = json.Unmarshal(array, &out)
	return out, jsonError(raw, base, err, shape)
}

// jsonError gives the decoder's complaint its line; what was decoded begins at
// base.
func jsonError(raw []byte, base int, err error, shape string) error {
	var syntax *json.SyntaxError
	var value *json.UnmarshalTypeError
	switch {
	case errors.As(err, &syntax):
		return &lineError{lineAt(raw, base+int(syntax.Offset)), "is not JSON: " + syntax.Error()}
	case errors.As(err, &value):
		return &lineError{lineAt(raw, base+int(value.Offset)), fmt.Sprintf("%s does not belong here or is out of range; write %s", value.Value, shape)}
	}
	return err
}

func lineAt(raw []byte, offset int) int {
	return 1 + bytes.Count(raw[:min(offset, len(raw))], []byte("\n"))
}

// tapsFromWAV reads a recording of one channel, its full scale 1.
func tapsFromWAV(r *audio.Recording) ([]float64, error) {
	if n := r.Format().NumChannels; n != 1 {
		return nil, fmt.Errorf("has %d channels; an impulse response for a fir stage has 1", n)
	}
	if n := r.Frames(); n > design.MaxTaps {
		return nil, fmt.Errorf("has %d frames; a kernel has at most %d taps", n, design.MaxTaps)
	}
	taps := make([]float64, r.Frames())
	for done := 0; done < len(taps); {
		n, err := r.ReadFrames(taps[done:])
		if err != nil {
			if err == io.EOF {
				err = io.ErrUnexpectedEOF
			}
			return nil, err
		}
		done += n
	}
	return taps, nil
}
