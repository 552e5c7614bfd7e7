package main

import "strings"

// texts is the value of a flag that may be given more than once. The library's own
// would break each at its commas, and takes more room in the help.
type texts []string

// Set adds one.
func (t *texts) Set(text string) error {
	*t = append(*t, text)
	return nil
}

func (t *texts) String() string { return strings.Join(*t, ", ") }
