package probe

import (
	"bytes"
	"encoding/json"
	"errors"
	"fmt"
	"io"
)

// ChunkID is the RIFF chunk that a probe file carries its parameters in.
// Lower case, as ids outside the registered ones are.
const ChunkID = "fprb"

// Schema names the layout of the chunk. Any change of a key or of what the
// generator makes of it gets another number.
const Schema = "fettle.probe/1"

// mostBytes is the longest payload that is looked at.
const mostBytes = 4096

// ErrNoProbe marks bytes that are no parameters of a probe.
var ErrNoProbe = errors.New("not the parameters of a probe")

type document struct {
	Schema string `json:"schema"`
	Parameters
}

// Encode gives the chunk's payload: one JSON object in UTF-8 with the schema and
// every parameter. Numbers are written so that Decode gives the same bits.
func (p Parameters) Encode() []byte {
	b, err := json.Marshal(document{Schema, p})
	if err != nil { // a NaN or an infinity, which Check refuses
		panic(fmt.Sprintf("probe: %v", err))
	}
	return b
}

// Decode reads what Encode wrote and checks it. Errors unwrap to ErrNoProbe.
func Decode(payload []byte) (Parameters, error) {
	payload = bytes.TrimRight(payload, "\x00")
	if len(payload) > mostBytes {
		return Parameters{}, fmt.Errorf("%w: %d bytes, more than %d", ErrNoProbe, len(payload), mostBytes)
	}
	var d document
	dec := json.NewDecoder(bytes.NewReader(payload))
	dec.DisallowUnknownFields()
	if err := dec.Decode(&d); err != nil {
		return Parameters{}, fmt.Errorf("%w: %v; make the probe again", ErrNoProbe, err)
	}
	if _, err := dec.Token(); err != io.EOF {
		return Parameters{}, fmt.Errorf("%w: something follows the JSON object; make the probe again", ErrNoProbe)
	}
	if d.Schema != Schema {
		return Parameters{}, fmt.Errorf("%w: schema %q, this program knows %s; use the version that made it", ErrNoProbe, d.Schema, Schema)
	}
	if err := d.Check(); err != nil {
		return Parameters{}, fmt.Errorf("%w: %v; make the probe again", ErrNoProbe, err)
	}
	return d.Parameters, nil
}
