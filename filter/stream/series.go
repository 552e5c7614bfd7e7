package stream

// Series returns a kernel that puts the stream through the given kernels one
// after another. All must be for the same number of channels; they belong to
// the series from then on. Delay and Tail are the sums of theirs. Without
// kernels the output is a copy of the input, of any number of channels.
func Series(kernels ...Kernel) Kernel {
	return series(append([]Kernel(nil), kernels...))
}

type series []Kernel

func (s series) Process(dst, src [][]float64) {
	if len(s) == 0 {
		checkShape(dst, src, len(src))
		copyPlanes(dst, src)
		return
	}
	for _, k := range s {
		k.Process(dst, src)
		src = dst
	}
}

func copyPlanes(dst, src [][]float64) {
	for c := range src {
		copy(dst[c], src[c])
	}
}

func (s series) Delay() int {
	sum := 0
	for _, k := range s {
		sum += k.Delay()
	}
	return sum
}

func (s series) Tail() int {
	sum := 0
	for _, k := range s {
		sum += k.Tail()
	}
	return sum
}

func (s series) Reset() {
	for _, k := range s {
		k.Reset()
	}
}
