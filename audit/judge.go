package audit

import "fettle/audit/limits"

// Judge holds a result against limits.
func (r *Result) Judge(l []limits.Limit) {
	s := limits.Of(r.Figures, float64(r.Rate))
	s.Latency = float64(r.Latency.LookAhead) + r.Latency.Residual
	s.TargetError = r.TargetErrorDB
	r.Verdicts = limits.Judge(s, l)
}

// Exceeded tells whether a limit makes a run of these results fail.
func Exceeded(results []*Result) bool {
	for _, r := range results {
		if len(limits.Failed(r.Verdicts)) > 0 {
			return true
		}
	}
	return false
}
