package abreast

import (
	"testing"

	"fettle/audio/asmtest"
)

func TestAssemblyIsCurrent(t *testing.T) {
	asmtest.Current(t, "_asm", ".", "-out", "../chains_amd64.s", "-stubs", "../chains_amd64.go", "-pkg", "abreast")
}

func TestPuregoHasNoAssembly(t *testing.T) { asmtest.WithoutAssembly(t, "chains_amd64.s") }
