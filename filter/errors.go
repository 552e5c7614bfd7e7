package filter

import (
	"errors"
	"fmt"
	"strconv"

	"github.com/goccy/go-yaml"
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

// syntaxError puts the YAML parser's complaint in the chain's own form.
func syntaxError(file string, err error) *ChainError {
	e := &ChainError{File: file, Msg: "is not YAML: " + err.Error()}
	var s *yaml.SyntaxError
	if errors.As(err, &s) {
		e.Msg = "is not YAML here: " + s.Message
		e.Line, e.Column = s.Token.Position.Line, s.Token.Position.Column
	}
	return e
}

// quote shows what was read, its beginning if it is long.
func quote(text string) string {
	const most = 60
	if runes := []rune(text); len(runes) > most {
		text = string(runes[:most]) + "..."
	}
	return strconv.Quote(text)
}

// ErrForRecording marks a chain that is sound but cannot serve one recording:
// a frequency at or above half its rate, a channel that it does not have.
var ErrForRecording = errors.New("the chain cannot serve this recording")

// recordingError is a ChainError about one recording's rate or channels.
type recordingError struct{ ChainError }

func (e *recordingError) Unwrap() error { return ErrForRecording }

// errPhase marks what no rate could help: a stage that has no such realisation.
var errPhase = errors.New("no such realisation")

// phaseError says so in the user's terms.
type phaseError string

func (e phaseError) Error() string        { return string(e) }
func (e phaseError) Is(target error) bool { return target == errPhase }
