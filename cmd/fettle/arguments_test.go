package main

import (
	"io"
	"slices"
	"strings"
	"testing"
)

func TestFlagsFirst(t *testing.T) {
	tests := []struct{ args, want string }{
		{"", ""},
		{"render", "render"},
		{"render a b", "render -- a b"},
		{"render a --out x b", "render --out x -- a b"},
		{"render a --out=x b", "render --out=x -- a b"},
		{"render a -out x", "render -out x -- a"},
		{"render --again a", "render --again -- a"},
		{"render --again=false a", "render --again=false -- a"},
		{"render a --headroom -3dB", "render --headroom -3dB -- a"},
		{"render a --json - b", "render --json - -- a b"},
		{"render - --again", "render --again -- -"},
		{"render a -- --out x", "render -- a --out x"},
		{"render --out x -- -- b", "render --out x -- -- b"},
		{"render --out -- a", "render --out -- -- a"}, // "--" is the value here
		{"render a -h", "render -h -- a"},
		{"audit chain x --rate 48k", "audit chain --rate 48k -- x"},
		{"audit x chain", "audit -- x chain"},
		{"--version", "--version"},
		{"-v render", "-v -- render"},
		{"bogus a", "-- bogus a"},
	}
	for _, test := range tests {
		got, err := flagsFirst(newApp(io.Discard, io.Discard), append([]string{"fettle"}, strings.Fields(test.args)...))
		mustDo(t, err)
		if want := append([]string{"fettle"}, strings.Fields(test.want)...); !slices.Equal(got, want) {
			t.Errorf("%q became %q, want %q", test.args, got, want)
		}
	}
}

func TestFlagsFirstRefuses(t *testing.T) {
	tests := []struct{ args, want string }{
		{"render --outt x", "--outt: there is no such flag; see fettle render --help"},
		{"render a -x", "-x: there is no such flag; see fettle render --help"},
		{"render --rate 48k", "--rate: there is no such flag; see fettle render --help"},
		{"render a --out", "--out: its value is missing; see fettle render --help"},
		{"audit chain --version", "--version: there is no such flag; see fettle audit chain --help"},
		{"--out", "--out: there is no such flag; see fettle --help"},
	}
	for _, test := range tests {
		_, err := flagsFirst(newApp(io.Discard, io.Discard), append([]string{"fettle"}, strings.Fields(test.args)...))
		if err == nil || err.Error() != test.want {
			t.Errorf("%q: %v, want %q", test.args, err, test.want)
		}
	}
	if got, err := flagsFirst(newApp(io.Discard, io.Discard), nil); len(got) != 0 || err != nil {
		t.Errorf("no words at all: %q, %v", got, err)
	}
}
