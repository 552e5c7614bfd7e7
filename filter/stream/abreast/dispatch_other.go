//go:build !amd64 || purego

package abreast

import "fettle/filter/stream/machine"

func shapes(machine.Kernel) []shape { return portable }
