package filter

import (
	"errors"
	"fmt"
)

// ChainError says what is wrong in a chain file and where.
type ChainError struct {
	File         string
	Line, Column int    // from 1; 0 where the whole file is meant
	Msg          string // what was read and what is allowed
}

func (e *ChainError) Error() string {
	if e.Line == 0 {
		return fmt.Sprintf("%s: %s", e.File, e.Msg)
	}
	return fmt.Sprintf("%s:%d:%d: %s", e.File, e.Line, e.Column, e.Msg)
}

// ErrForRecording marks a chain that is sound but cannot serve one recording:
// a frequency at or above half its rate, a channel that it does not have.
var ErrForRecording = errors.New("the chain cannot serve this recording")

// recordingError is a ChainError about one recording's rate or channels.
type recordingError struct{ ChainError }

func (e *recordingError) Unwrap() error { return ErrForRecording }
