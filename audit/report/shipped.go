package report

import (
	"fmt"
	"io"
	"strings"

	"fettle/audit"
	"fettle/audit/figures"
	"fettle/audit/probe"
)

// ThroughFile tables what was measured of a result through files, beside what is
// computed; it writes nothing for a result that was not.
func ThroughFile(w io.Writer, r *audit.Result) error {
	if len(r.ThroughFile) == 0 {
		return nil
	}
	var b strings.Builder
	row := func(name, computed string, cell func(t audit.ThroughFile) string) {
		fmt.Fprintf(&b, "  %-27s %16s", name, computed)
		for _, t := range r.ThroughFile {
			fmt.Fprintf(&b, " %24s", cell(t))
		}
		b.WriteByte('\n')
	}
	figure := func(name, computed string, cell func(f, e *figures.Figures) string) {
		row(name, computed, func(t audit.ThroughFile) string {
			if t.Captured.Absent != "" {
				return "not stated"
			}
			return cell(t.Captured.Figures, t.Captured.Errors)
		})
	}
	f := r.Figures
	row("through a file", "computed", func(t audit.ThroughFile) string { return t.Encoding.String() + ", by " + string(t.Probe.Kind) })
	row("latency left, samples", decimal(r.Latency.Residual, 2), func(t audit.ThroughFile) string {
		return plusMinus(t.Captured.Latency, t.Captured.LatencyErr, 4)
	})
	row("delay spread", milliseconds(f.DelaySpread), func(t audit.ThroughFile) string { return shippedSpread(r, t) })
	figure("smear, pink", milliseconds(f.Pink.Total), func(f, e *figures.Figures) string { return plusMinusMS(f.Pink.Total, e.Pink.Total) })
	figure("smear, white", milliseconds(f.White.Total), func(f, e *figures.Figures) string { return plusMinusMS(f.White.Total, e.White.Total) })
	figure("pre-ring to -60 dB, white", milliseconds(f.PreRing.White.Length), func(f, e *figures.Figures) string {
		return plusMinusMS(f.PreRing.White.Length, e.PreRing.White.Length)
	})
	figure("post-ring to -60 dB, white", milliseconds(f.PostRing.White.Length), func(f, e *figures.Figures) string {
		return plusMinusMS(f.PostRing.White.Length, e.PostRing.White.Length)
	})
	row("arrivals differ by up to", "", func(t audit.ThroughFile) string {
		return fmt.Sprintf("%s at %g Hz", microseconds(t.Apart.Seconds), t.Apart.Hz)
	})
	row("bands within their interval", "", func(t audit.ThroughFile) string { return fmt.Sprintf("%d of %d", t.Apart.Within, t.Apart.Bands) })
	_, err := io.WriteString(w, b.String())
	return err
}

// shippedSpread is not stated unless all bands are that the chain carries.
func shippedSpread(r *audit.Result, t audit.ThroughFile) string {
	carried := 0
	for _, b := range r.Figures.Bands {
		if b.Carried {
			carried++
		}
	}
	if t.Captured.Absent != "" || t.Apart.Bands < carried {
		return "not stated"
	}
	return plusMinusMS(t.Captured.Figures.DelaySpread, t.Captured.Errors.DelaySpread)
}

type throughFile struct {
	Format         string           `json:"format"`
	Probe          probe.Parameters `json:"probe"`
	DisagreementUS number           `json:"disagreement_us"` // of arrivals, latency included
	WorstHz        number           `json:"worst_hz"`
	Within         int              `json:"within"` // of bands, inside their 95 % interval
	Bands          int              `json:"bands"`
	Result         result           `json:"result"`
}

func throughFileJSON(t audit.ThroughFile) throughFile {
	return throughFile{t.Encoding.String(), t.Probe, number(t.Apart.Seconds * toUS), number(t.Apart.Hz), t.Apart.Within, t.Apart.Bands, capturedJSON(t.Captured)}
}
