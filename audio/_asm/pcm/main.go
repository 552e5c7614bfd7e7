// Command pcm writes the assembly of package pcm; see kernels.go there for what
// the functions do.
//
//	go run ./pcm -out ../pcm/kernels_amd64.s -stubs ../pcm/kernels_amd64.go -pkg pcm
package main

import (
	. "github.com/mmcloughlin/avo/build"
)

func main() {
	ConstraintExpr("amd64,!purego")
	decoders()
	encoders()
	drawAVX2()
	drawAVX512()
	pairs()
	unpairs()
	Generate()
}
