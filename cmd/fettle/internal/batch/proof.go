package batch

import (
	"fmt"

	"fettle/audio"
)

// prove looks at an output before it gets its name: it is a recording of as many
// frames as were sent.
func (r *rendering) prove(path string) error {
	r.plan.slots.enter()
	defer r.plan.slots.leave()
	out, err := audio.Open(path)
	if err != nil {
		return fmt.Errorf("read back, it is no recording: %w", err)
	}
	defer out.Close()
	if out.Frames() != r.entry.Frames {
		return fmt.Errorf("read back, it has %d frames instead of %d; check the disk", out.Frames(), r.entry.Frames)
	}
	return nil
}
