package audio

import "encoding/hex"

// SHA256 is the hash of the whole file in lower-case hexadecimal. Samples are
// hashed as they stream through the first pass, so that after it only what
// stands behind them is left to be read; called earlier, it reads the rest by
// itself and leaves the stream where it is.
func (r *Recording) SHA256() (string, error) {
	if err := r.hashUpTo(r.size); err != nil {
		return "", err
	}
	return hex.EncodeToString(r.hash.Sum(nil)), nil
}

// hashUpTo hashes the bytes from where the hash stands to end.
func (r *Recording) hashUpTo(end int64) error {
	b := make([]byte, min(bufferBytes, max(0, end-r.hashed)))
	for r.hashed < end {
		b = b[:min(int64(len(b)), end-r.hashed)]
		if err := r.readAt(b, r.hashed); err != nil {
			return err
		}
		r.addToHash(b, r.hashed)
	}
	return nil
}

// addToHash takes in bytes of the file from byte `at` on, if the hash stands
// there; otherwise it has seen them.
func (r *Recording) addToHash(b []byte, at int64) {
	if at == r.hashed {
		r.hash.Write(b) // never fails
		r.hashed += int64(len(b))
	}
}
