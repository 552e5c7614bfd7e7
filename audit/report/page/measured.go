package page

import (
	"fmt"

	"fettle/audit/capture"
	"fettle/audit/pair"
	"fettle/audit/report"
)

// OfCapture is a channel of a capture as a subject.
func OfCapture(c *capture.Result) Subject {
	return Subject{
		Label: channelLabel(c.Channel), Summary: report.CaptureWords(c), Notes: c.Warnings, Rate: float64(c.Rate),
		Figures: c.Figures, Errors: c.Errors, Verdicts: c.Verdicts, Removed: float64(c.Removed),
		Response: c.Response, Origin: c.Origin,
	}
}

// OfPair is a channel of a pair as a subject; it has no impulse response.
func OfPair(r *pair.Report, c *pair.Result) Subject {
	s := Subject{Label: channelLabel(c.Channel), Summary: report.PairWords(r, c), Rate: float64(r.Rate), Verdicts: c.Verdicts, Removed: float64(r.Lag)}
	if c.Absent == "" {
		s.Figures, s.Errors = r.FiguresOf(c)
	}
	return s
}

func channelLabel(n int) string { return fmt.Sprintf("channel %d", n) }
