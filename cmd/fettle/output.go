package main

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"unicode"
	"unicode/utf8"

	"fettle/audit/report"
	"fettle/audit/report/page"

	"github.com/google/renameio/v2"
	"github.com/urfave/cli/v2"
)

// ours is how a file begins that fettle wrote and may replace; a recording, a
// chain or anybody's notes named by mistake must not be lost.
var ours = [][]byte{[]byte("{\n \"schema\": \"fettle."), []byte("chain,phase,rate_hz,channel,stage,"), []byte(report.MeasuredCSV), []byte(page.Start)}

func isOurs(start []byte) bool {
	return page.IsPlot(start) || slices.ContainsFunc(ours, func(o []byte) bool { return bytes.HasPrefix(start, o) })
}

// tryWriting proves before any work is done that writeTo will succeed.
func tryWriting(name string) error {
	if name == "" || name == "-" {
		return nil
	}
	if err := mayReplace(name); err != nil {
		return err
	}
	f, err := renameio.NewPendingFile(name, beside(name))
	if err != nil {
		return unwritable(name, err)
	}
	return f.Cleanup()
}

func mayReplace(name string) error {
	info, err := os.Stat(name)
	switch {
	case err != nil:
		return nil // is not there, or writing will say what is wrong
	case !info.Mode().IsRegular():
		return fmt.Errorf("%s: is not a file that can be replaced; choose another file", name)
	}
	f, err := os.Open(name)
	if err != nil {
		return unwritable(name, err)
	}
	defer f.Close()
	start := make([]byte, 64)
	if n, _ := io.ReadFull(f, start); n > 0 && !isOurs(start[:n]) {
		return fmt.Errorf("%s: is there already and is no report of fettle's; choose another file, or remove it", name)
	}
	return nil
}

// writeTo gives write a named file, which appears whole or not at all, or
// standard output for "-". No name: nothing is written.
func writeTo(c *cli.Context, name string, write func(io.Writer) error) error {
	switch name {
	case "":
		return nil
	case "-":
		return write(c.App.Writer)
	}
	if err := mayReplace(name); err != nil {
		return err
	}
	var buf bytes.Buffer
	if err := write(&buf); err != nil {
		return err
	}
	if err := renameio.WriteFile(name, buf.Bytes(), 0o666, beside(name)); err != nil {
		return unwritable(name, err)
	}
	return nil
}

// beside puts the temporary file where the final one goes, the one place that
// the user has named.
func beside(name string) renameio.Option { return renameio.WithTempDir(filepath.Dir(name)) }

// unwritable leaves out the temporary file that the system's error names.
func unwritable(name string, err error) error {
	var p *fs.PathError
	if errors.As(err, &p) {
		err = p.Err
	}
	return fmt.Errorf("%s: cannot be written: %w; choose another file", name, err)
}

// plain makes text safe to print on one line of a terminal: control characters
// and bytes that are no UTF-8, both possible in file names, are escaped.
func plain(text string) string {
	var b strings.Builder
	for len(text) > 0 {
		r, size := utf8.DecodeRuneInString(text)
		switch {
		case r == '\n':
			b.WriteString(`\n`)
		case r == utf8.RuneError && size == 1, unicode.IsControl(r):
			for _, c := range []byte(text[:size]) {
				fmt.Fprintf(&b, `\x%02x`, c)
			}
		default:
			b.WriteString(text[:size])
		}
		text = text[size:]
	}
	return b.String()
}

// unlessInterrupted waits for work that knows no context, and no longer when
// ctx ends. The work must have no effect but its results.
func unlessInterrupted[T any](ctx context.Context, work func() (T, error)) (T, error) {
	var value T
	var err error
	done := make(chan struct{})
	go func() {
		defer close(done)
		value, err = work()
	}()
	select {
	case <-done:
		return value, err
	case <-ctx.Done():
		var none T
		return none, ctx.Err()
	}
}
