package audit

import (
	"fmt"

	"fettle/audio"
	"fettle/audit/onsets"
	"fettle/filter"
	"fettle/filter/stream/machine"
)

// Listen compares the onsets of a recording with what filters make of them, each with its
// chain's edges: one report a filter, in their order. The onsets are found once. Errors
// name the recording: it cannot be read, or does not suit a filter.
func Listen(recording string, kernel machine.Kernel, filters ...*filter.Filter) ([]*onsets.Report, error) {
	original, err := audio.Open(recording)
	if err != nil {
		return nil, err
	}
	defer original.Close()
	var treated []audio.Source
	for _, f := range filters {
		again, err := audio.Open(recording)
		if err != nil {
			return nil, err
		}
		defer again.Close()
		setup := f.Setup()
		setup.Kernel = kernel
		out, err := f.ApplyWith(again, setup)
		if err != nil {
			return nil, fmt.Errorf("%s: %w", recording, err)
		}
		ahead := audio.NewAhead(out, 16384, 2)
		defer ahead.Close()
		treated = append(treated, ahead)
	}
	reports, err := onsets.MeasureEach(original, treated, onsets.Options{})
	if err != nil {
		return nil, fmt.Errorf("%s: %w", recording, err)
	}
	return reports, nil
}
