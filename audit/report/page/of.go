package page

import (
	"slices"

	"fettle/audit"
	"fettle/audit/report"
)

// Of is a chain's audit as a subject.
func Of(label string, r *audit.Result) Subject {
	target := Target(r.Target)
	return Subject{
		Label: label, Summary: report.Words(r), Notes: append(slices.Clone(r.Notes), r.Warnings...), Rate: float64(r.Rate),
		Figures: r.Figures, Verdicts: r.Verdicts, Removed: r.Latency.Removed,
		Response: r.Response, Origin: r.Origin, Target: &target,
	}
}
