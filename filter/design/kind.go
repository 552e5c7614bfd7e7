package design

import (
	"fmt"
	"math"
)

// Kind is the shape of a magnitude response.
type Kind int

const (
	Lowpass Kind = iota
	Highpass
	Bandpass
	Bandstop
)

// String names the kind as a chain file does.
func (k Kind) String() string {
	switch k {
	case Lowpass:
		return "lowpass"
	case Highpass:
		return "highpass"
	case Bandpass:
		return "bandpass"
	case Bandstop:
		return "bandstop"
	}
	return fmt.Sprintf("Kind(%d)", int(k))
}

// Edges returns how many frequencies describe one side of the shape: 1, or 2
// for a band.
func (k Kind) Edges() int {
	if k == Bandpass || k == Bandstop {
		return 2
	}
	return 1
}

// passesDC tells on which side of its lowest edge the shape passes.
func (k Kind) passesDC() bool { return k == Lowpass || k == Bandstop }

func checkKind(kind Kind) error {
	if kind < Lowpass || kind > Bandstop {
		return fmt.Errorf("%v is none of lowpass, highpass, bandpass, bandstop", kind)
	}
	return nil
}

// checkFrequency refuses what a digital filter at this rate cannot have.
func checkFrequency(hz, rate float64) error {
	switch {
	case !(rate > 0) || math.IsInf(rate, 1):
		return fmt.Errorf("a rate of %g Hz is not a sample rate; it must be above 0 Hz", rate)
	case !(hz > 0):
		return fmt.Errorf("%g Hz is not above 0 Hz; choose a frequency between 0 and half the sample rate (%g Hz)", hz, rate/2)
	case !(hz < rate/2):
		return fmt.Errorf("%g Hz is not below half the sample rate (%g Hz); choose a lower frequency, or a recording with a higher rate", hz, rate/2)
	}
	return nil
}

// checkEdges refuses a wrong number of edges, or edges out of order.
func checkEdges(kind Kind, rate float64, edges []float64) error {
	if err := checkKind(kind); err != nil {
		return err
	}
	if len(edges) != kind.Edges() {
		return fmt.Errorf("a %v has %d edge frequencies, not %d", kind, kind.Edges(), len(edges))
	}
	for _, hz := range edges {
		if err := checkFrequency(hz, rate); err != nil {
			return err
		}
	}
	if len(edges) == 2 && !(edges[0] < edges[1]) {
		return fmt.Errorf("the lower edge %g Hz is not below the upper edge %g Hz; swap them", edges[0], edges[1])
	}
	return nil
}

// MaxOrder is the largest prototype order of the recursive families. Beyond it
// a filter rings longer than anyone wants, and no use for it is known here.
const MaxOrder = 32

func checkOrder(order int) error {
	if order < 1 || order > MaxOrder {
		return fmt.Errorf("order %d is not between 1 and %d", order, MaxOrder)
	}
	return nil
}

// prewarp returns the analogue frequency that the bilinear transform
// s = (z-1)/(z+1) puts at hz.
func prewarp(hz, rate float64) float64 { return math.Tan(math.Pi * hz / rate) }
