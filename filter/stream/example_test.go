package stream_test

import (
	"fmt"

	"fettle/filter/stream"
)

// Three samples through a delay of two: the tail is fed with zeros, and as
// many samples as the block delay, none here, are dropped from the front.
func ExampleKernel() {
	var k stream.Kernel = stream.Series(stream.NewDelay(2, 1), stream.NewFIR([]float64{0.5, 0.5}).Kernel(1, stream.Anything()))
	x := append([]float64{1, 2, 3}, make([]float64, k.Delay()+k.Tail())...)
	k.Process([][]float64{x}, [][]float64{x})
	fmt.Println(x[k.Delay():])
	// Output: [0 0 0.5 1.5 2.5 1.5]
}
