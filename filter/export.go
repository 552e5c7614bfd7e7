package filter

import (
	"bufio"
	"encoding/binary"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"math"
	"strconv"
	"strings"

	"fettle/audio/container"
)

// Form is a way to write a path's coefficients for other programs.
type Form string

// The forms: one tap a line; rows of b0 b1 b2 a0 a1 a2; both and more as JSON;
// the kernel as a WAV file of 64-bit float. Text and JSON are read back by the
// stages fir and biquads, with the same bits.
const (
	FormTaps    Form = "taps"
	FormBiquads Form = "biquads"
	FormJSON    Form = "json"
	FormWAV     Form = "wav"
)

// Forms lists every form.
var Forms = []string{string(FormTaps), string(FormBiquads), string(FormJSON), string(FormWAV)}

// Export writes a path's coefficients, causal: latency is not removed, wanted
// delay is in them. It fails for a form that cannot hold the path, with the
// form that can, and writes nothing then.
func (f *Filter) Export(w io.Writer, p *Path, form Form) error {
	if err := p.fits(form); err != nil {
		return err
	}
	switch form {
	case FormTaps:
		return f.exportTaps(w, p)
	case FormBiquads:
		return f.exportBiquads(w, p)
	case FormWAV:
		return f.exportWAV(w, p)
	}
	return f.exportJSON(w, p)
}

// fits tells whether a form can hold all of a path.
func (p *Path) fits(form Form) error {
	s := p.System
	switch {
	case form == FormJSON:
		return nil
	case len(s.Zero) > 0:
		return fmt.Errorf("sections run forward and backward cannot be written as %s; json names them apart, or ask for --phase linear", form)
	case form != FormBiquads && len(s.Sections) > 0 && s.Taps != nil:
		return fmt.Errorf("a kernel with recursive sections behind it cannot be written as %s; json holds both, or ask for one --phase for all", form)
	case form != FormBiquads && len(s.Sections) > 0:
		return fmt.Errorf("a recursive chain cannot be written as %s; biquads can hold it, or ask for --phase minimum or linear", form)
	case form == FormBiquads && s.Taps != nil:
		return errors.New("a kernel cannot be written as biquads; taps can hold it, or ask for --phase iir")
	case form == FormBiquads && p.Delay > 0:
		return errors.New("a delay cannot be written as biquads; json holds it, or leave the delay stage out")
	}
	return nil
}

// kernelTaps is the kernel with the wanted delay ahead of it.
func (p *Path) kernelTaps() []float64 {
	taps := p.System.Taps
	if taps == nil {
		taps = []float64{1}
	}
	return append(make([]float64, p.Delay), taps...)
}

// remarks tells what was exported, a line each.
func (f *Filter) remarks(p *Path) []string {
	l := f.Latency(p)
	return []string{
		fmt.Sprintf("%s, %s, %d Hz", f.chain.Name, f.Phase(), f.rate),
		strings.TrimPrefix(rateRemark, "# ") + strconv.Itoa(f.rate),
		fmt.Sprintf("latency %.6g samples, of which %.6g are removed when rendering", l.Exact, l.Removed),
	}
}

func (f *Filter) exportTaps(w io.Writer, p *Path) error {
	return writeLines(w, f.remarks(p), p.kernelTaps(), func(v float64) string { return fmt.Sprintf("%.17g", v) })
}

func (f *Filter) exportBiquads(w io.Writer, p *Path) error {
	return writeLines(w, append(f.remarks(p), rowsRemark), p.rows(), func(row [6]float64) string {
		return fmt.Sprintf("%.17g %.17g %.17g %.17g %.17g %.17g", row[0], row[1], row[2], row[3], row[4], row[5])
	})
}

// rows gives the sections as b0 b1 b2 a0 a1 a2; no section at all is one that
// changes nothing.
func (p *Path) rows() [][6]float64 {
	rows := [][6]float64{}
	for _, s := range p.System.Sections {
		rows = append(rows, [6]float64{s.B0, s.B1, s.B2, 1, s.A1, s.A2})
	}
	if len(rows) == 0 {
		rows = append(rows, [6]float64{1, 0, 0, 1, 0, 0})
	}
	return rows
}

func writeLines[T any](w io.Writer, remarks []string, values []T, line func(T) string) error {
	out := bufio.NewWriter(w)
	for _, r := range remarks {
		fmt.Fprintf(out, "# %s\n", r)
	}
	for _, v := range values {
		fmt.Fprintln(out, line(v))
	}
	return out.Flush()
}

func (f *Filter) exportJSON(w io.Writer, p *Path) error {
	l := f.Latency(p)
	doc := struct {
		Schema         string       `json:"schema"`
		Chain          string       `json:"chain"`
		Phase          Realisation  `json:"phase"`
		RateHz         int          `json:"rate_hz"`
		LatencySamples float64      `json:"latency_samples"` // of the coefficients, exact
		RemovedSamples float64      `json:"removed_samples"`
		DelaySamples   int          `json:"delay_samples"` // wanted, not in taps
		Taps           []float64    `json:"taps"`
		Sections       [][6]float64 `json:"sections"`
		ZeroSections   [][6]float64 `json:"zero_sections"` // to be run forward and backward
	}{
		"fettle.coefficients/1", f.chain.Name, f.Phase(), f.rate, l.Exact, l.Removed, p.Delay,
		p.System.Taps, nil, nil,
	}
	if len(p.System.Sections) > 0 {
		doc.Sections = p.rows()
	}
	for _, s := range p.System.Zero {
		doc.ZeroSections = append(doc.ZeroSections, [6]float64{s.B0, s.B1, s.B2, 1, s.A1, s.A2})
	}
	enc := json.NewEncoder(w)
	enc.SetEscapeHTML(false)
	enc.SetIndent("", " ")
	return enc.Encode(doc)
}

func (f *Filter) exportWAV(w io.Writer, p *Path) error {
	taps := p.kernelTaps()
	header, err := container.Header(container.Format{Float: true, Channels: 1, Rate: f.rate, Bytes: 8, ValidBits: 64}, nil, int64(len(taps)))
	if err != nil {
		return err
	}
	for _, v := range taps {
		header = binary.LittleEndian.AppendUint64(header, math.Float64bits(v))
	}
	_, err = w.Write(header)
	return err
}
