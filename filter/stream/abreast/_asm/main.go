// Command asm writes the assembly of package abreast: a function for each
// arrangement of lanes, see doc.go there for what they do.
//
//	go run . -out ../chains_amd64.s -stubs ../chains_amd64.go -pkg abreast
package main

import . "github.com/mmcloughlin/avo/build"

func main() {
	ConstraintExpr("amd64,!purego")
	defineConstants()
	for _, c := range []chain{
		{xmm, 1, 1}, {ymm, 1, 1}, {ymm, 2, 1},
		{xmm, 1, 2}, {ymm, 1, 2}, {ymm, 2, 2},
		{zmm, 1, 1}, {zmm, 2, 1},
		{zmm, 1, 2}, {zmm, 2, 2},
	} {
		c.write()
	}
	Generate()
}
