package batch

import (
	"fmt"

	"fettle/audio"
)

// prove reads an output back before it gets its name: it is what was sent, a
// recording of as many frames, and in step with the original.
func (r *rendering) prove(path, want string) error {
	r.plan.slots.enter()
	defer r.plan.slots.leave()
	sum, _, err := hashFile(path)
	if err != nil {
		return fmt.Errorf("cannot be read back: %w; check the disk", cause(err))
	}
	if sum != want {
		return fmt.Errorf("read back, it is not what was written: SHA-256 %s, sent %s; check the disk and the memory", sum, want)
	}
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
