package page

import (
	"io"
	"testing"
)

func BenchmarkWrite(b *testing.B) {
	_, p := rumblePage(b)
	p.Subjects = append(p.Subjects, p.Subjects...)
	for b.Loop() {
		if err := Write(io.Discard, p); err != nil {
			b.Fatal(err)
		}
	}
}
