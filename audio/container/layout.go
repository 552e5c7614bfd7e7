package container

// Extent is a run of bytes in a file.
type Extent struct {
	Offset int64 // of its first byte, from the start of the file
	Size   int64 // in bytes
}

// Chunk is one row of the chunk table.
type Chunk struct {
	ID     string // 4 bytes, printable ASCII
	Offset int64  // of the first byte of the payload
	Size   int64  // of the payload that is really there, without the pad byte
	Cut    bool   // the file ends before the payload does
}

// Layout is where everything in a WAV file is.
type Layout struct {
	Form   Form
	Format Format
	Fmt    []byte // payload of the fmt chunk; as stored, but little-endian
	// Data are the samples: whole frames only, and within the file. The row of
	// the data chunk in Chunks may be a few bytes longer.
	Data     Extent
	Chunks   []Chunk // all of the file, in order
	Warnings []string
}

// Frames is the number of whole frames.
func (l *Layout) Frames() int64 { return l.Data.Size / int64(l.Format.FrameBytes()) }
