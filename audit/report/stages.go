package report

import (
	"fmt"
	"io"
	"strings"

	"fettle/audit"
)

// Stages tables what each stage costs by itself.
func Stages(w io.Writer, results []*audit.Result) error {
	var b strings.Builder
	fmt.Fprintf(&b, "  %-40s %10s %10s %10s %10s %10s\n", "each stage by itself", "delay", "smear,", "of it by", "pre-ring", "post-ring")
	fmt.Fprintf(&b, "  %-40s %10s %10s %10s %10s %10s\n", "", "spread, ms", "pink, ms", "phase, ms", "pink, ms", "pink, ms")
	for _, r := range results {
		f := r.Figures
		fmt.Fprintf(&b, "  %-40s %10s %10s %10s %10s %10s\n", clip(r.Stage, 40), decimal(f.DelaySpread*toMS, 3),
			decimal(f.Pink.Total*toMS, 3), decimal(f.Pink.Phase*toMS, 3), decimal(f.PreRing.Pink.Length*toMS, 2), decimal(f.PostRing.Pink.Length*toMS, 2))
	}
	_, err := io.WriteString(w, b.String())
	return err
}
