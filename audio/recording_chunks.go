package audio

import "fettle/audio/container"

// Carry decides what of the recording's chunks goes into an output, for
// [Spec.Carriage]; see [container.Carry]. The recording must stay open until
// the output is committed, and one Carriage may serve several. Its bytes are read
// beside the stream of frames, which it does not disturb. Errors of reading begin
// with the path, also where an output that is being written returns them.
func (r *Recording) Carry(c container.Change) (*container.Carriage, error) {
	return container.Carry(fileReader{r}, r.layout, c)
}

// fileReader reads from a recording's file, with errors that name it.
type fileReader struct{ r *Recording }

func (f fileReader) ReadAt(b []byte, at int64) (int, error) {
	if err := f.r.readAt(b, at); err != nil {
		return 0, err
	}
	return len(b), nil
}

// Chunk returns the payload of the first chunk of that id, nil if there is none or
// if it has more than most bytes. Errors of reading begin with the path.
func (r *Recording) Chunk(id string, most int) ([]byte, error) {
	for _, c := range r.layout.Chunks {
		if c.ID != id {
			continue
		}
		if c.Size > int64(most) {
			return nil, nil
		}
		b := make([]byte, c.Size)
		_, err := fileReader{r}.ReadAt(b, c.Offset)
		return b, err
	}
	return nil, nil
}
