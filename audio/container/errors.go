package container

import (
	"errors"
	"fmt"
)

// The two reasons to refuse a file, for use with [errors.Is].
var (
	// ErrMalformed: the bytes contradict the format or themselves.
	ErrMalformed = errors.New("malformed WAV file")
	// ErrUnsupported: a valid file of a kind that is not read here.
	ErrUnsupported = errors.New("unsupported WAV file")
)

// Error tells at which byte of a file what is wrong, and what to do about it.
// It unwraps to [ErrMalformed], to [ErrUnsupported], or to the cause of a
// failed read.
type Error struct {
	Offset int64 // counted from the start of the file
	Msg    string
	kind   error
}

func (e *Error) Error() string { return fmt.Sprintf("byte %d: %s", e.Offset, e.Msg) }

// Unwrap gives the kind of error.
func (e *Error) Unwrap() error { return e.kind }

func malformed(offset int64, format string, args ...any) *Error {
	return &Error{Offset: offset, Msg: fmt.Sprintf(format, args...), kind: ErrMalformed}
}

func unsupported(offset int64, format string, args ...any) *Error {
	return &Error{Offset: offset, Msg: fmt.Sprintf(format, args...), kind: ErrUnsupported}
}

func unreadable(offset int64, cause error) *Error {
	return &Error{Offset: offset, Msg: fmt.Sprintf("cannot be read: %v; check the disk and the file", cause), kind: cause}
}
