package container

import (
	"bytes"
	"errors"
	"testing"
)

// counted notes how many bytes of buffers the parser had filled at the most.
type counted struct {
	*bytes.Reader
	largest int
}

func (c *counted) ReadAt(p []byte, at int64) (int, error) {
	c.largest = max(c.largest, len(p))
	return c.Reader.ReadAt(p, at)
}

// FuzzParse: any bytes give a layout that keeps within them, or an Error of a
// known kind at a byte within them; no buffer is larger than a fmt chunk may be
// and the chunk table is bounded.
func FuzzParse(f *testing.F) {
	f.Add(riff(stereo(), chunk("data", samples(8))))
	f.Add(riff(chunk("JUNK", samples(5)), chunk("fmt ", extensible(pcm16(2), 16, 3, subFormat(TagPCM))), sized("data", 0xFFFFFFFF, samples(10))))
	f.Add(riff(stereo(), sized("data", 0, samples(13))))
	f.Add(riff(stereo(), sized("data", 0, nil), chunk("LIST", samples(6))))
	f.Add(riff(stereo(), sized("data", 5, samples(5)), chunk("LIST", samples(6))))
	f.Add([]byte("RF64\xFF\xFF\xFF\xFFWAVEds64"))
	f.Add([]byte{})
	f.Fuzz(func(t *testing.T, b []byte) {
		if len(b) > 1<<20 {
			return
		}
		r := &counted{Reader: bytes.NewReader(b)}
		l, err := Parse(r, int64(len(b)))
		if r.largest > fmtMax || r.largest > len(b) {
			t.Errorf("a buffer of %d bytes for a file of %d", r.largest, len(b))
		}
		if err == nil {
			checkWithin(t, l, int64(len(b)))
			if len(l.Chunks) > maxChunks {
				t.Errorf("%d chunks", len(l.Chunks))
			}
			return
		}
		var e *Error
		if !errors.As(err, &e) || e.Offset < 0 || e.Offset > int64(len(b)) {
			t.Fatalf("error %v", err)
		}
		if !errors.Is(err, ErrMalformed) && !errors.Is(err, ErrUnsupported) {
			t.Errorf("error of no kind: %v", err)
		}
	})
}
