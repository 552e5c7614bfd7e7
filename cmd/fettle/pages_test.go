package main

import (
	"os"
	"path/filepath"
	"strings"
	"testing"
)

// TestPages: one page and the plots' files, of an audit and of a comparison, and
// again in their own places; never over anything else.
func TestPages(t *testing.T) {
	b := newBench(t)
	page, plots := b.path("page.html"), b.path("plots")
	for range 2 {
		fettle("audit", "chain", "--rate", "8k", "--html", page, "--plots", plots, b.chain(filterChain)).must(t, exitDone)
	}
	text := string(read(t, page))
	for _, want := range []string{"<svg", "8 kHz", "Content-Security-Policy"} {
		if !strings.Contains(text, want) {
			t.Errorf("the page has no %q", want)
		}
	}
	for _, name := range []string{"magnitude.svg", "magnitude.png", "timeline.svg"} {
		if info, err := os.Stat(filepath.Join(plots, name)); err != nil || info.Size() < 1000 {
			t.Errorf("%s: %v, %v", name, info, err)
		}
	}
	fettle("compare", "--rate", "8k", "--as", "minimum,iir", "--html", page, b.chain(filterChain)).must(t, exitDone)
	fettle("audit", "chain", "--rate", "8k", "--html", b.file("mine.html", []byte("<p>mine</p>")), b.chain(filterChain)).must(t, exitNotStarted, "mine.html")
	b.file("other/magnitude.svg", []byte("<svg/>"))
	fettle("audit", "chain", "--rate", "8k", "--plots", b.path("other"), b.chain(filterChain)).must(t, exitNotStarted, "magnitude.svg")
}
