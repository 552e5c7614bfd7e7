package main

import (
	"bytes"
	"fmt"
	"io"

	"github.com/google/renameio/v2"
	"github.com/urfave/cli/v2"
)

// writeTo gives write a named file, which appears whole or not at all, or
// standard output for "-". No name: nothing is written.
func writeTo(c *cli.Context, name string, write func(io.Writer) error) error {
	switch name {
	case "":
		return nil
	case "-":
		return write(c.App.Writer)
	}
	var buf bytes.Buffer
	if err := write(&buf); err != nil {
		return err
	}
	if err := renameio.WriteFile(name, buf.Bytes(), 0o666); err != nil {
		return fmt.Errorf("%s cannot be written: %w; choose another file", name, err)
	}
	return nil
}
