package batch

import (
	"encoding/hex"
	"encoding/json"
	"fmt"
	"strings"
	"unicode/utf8"
)

// name is a file's path in a record. JSON holds text, paths are bytes: a byte
// that belongs to no UTF-8 character is written as U+0000, which no path
// contains, and two hexadecimal digits. So different paths stay different, and
// all others stand as they are.
type name string

const escape = "\x00"

func (n name) MarshalJSON() ([]byte, error) {
	var text, out strings.Builder
	for s := string(n); len(s) > 0; {
		r, size := utf8.DecodeRuneInString(s)
		if r == utf8.RuneError && size == 1 {
			fmt.Fprintf(&text, escape+"%02x", s[0])
		} else {
			text.WriteString(s[:size])
		}
		s = s[size:]
	}
	enc := json.NewEncoder(&out)
	enc.SetEscapeHTML(false)
	err := enc.Encode(text.String())
	return []byte(out.String()), err
}

func (n *name) UnmarshalJSON(raw []byte) error {
	var text string
	if err := json.Unmarshal(raw, &text); err != nil {
		return err
	}
	parts := strings.Split(text, escape)
	for i, part := range parts[1:] {
		if len(part) < 2 {
			return fmt.Errorf("%q: U+0000 without two hexadecimal digits", text)
		}
		b, err := hex.DecodeString(part[:2])
		if err != nil {
			return fmt.Errorf("%q: U+0000 without two hexadecimal digits: %w", text, err)
		}
		if b[0] == 0 {
			return fmt.Errorf("%q: no path holds a byte of 0", text)
		}
		parts[i+1] = string(b) + part[2:]
	}
	*n = name(strings.Join(parts, ""))
	return nil
}
