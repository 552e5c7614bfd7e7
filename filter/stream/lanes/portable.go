package lanes

// portable convolves in plain Go, a complex number a point.
type portable struct {
	spectrum []complex128 // of the taps, bit-reversed, over N
	factors  []factor
}

// leaf is the largest block, in points, that is transformed pass by pass. A
// larger one is taken apart depth first: after its own pass each quarter is
// convolved to the end before the next is touched. 1024 points fill 16 KiB and
// stay in a first-level cache; 256 measures the same, 4096 slower by 5 %.
const leaf = 1024

// convolve is Plan.Convolve; x is as long as a block.
func (p *portable) convolve(yre, yim, re, im []float64, x []complex128) {
	parts := load(x, re, im)
	n := len(x) / parts
	for b := range parts {
		convolve(x[b*n:][:n], p.spectrum[b*n:][:n], p.factors, b)
	}
	store(yre, yim, x)
}

// forward sets x to the transform of re + j im, all of one length. factors is
// table(len(x)/4).
func forward(x []complex128, re, im []float64, factors []factor) {
	for m := len(x) / load(x, re, im); m >= 4; m /= 4 {
		forwardPass(x, m, 0, factors)
	}
}

// convolve transforms x, which is block number b of its level and a power of
// four long, multiplies it by spectrum and transforms it back.
func convolve(x, spectrum []complex128, factors []factor, b int) {
	m := len(x)
	if m <= leaf {
		convolveLeaf(x, spectrum, factors, b)
		return
	}
	forwardPass(x, m, b, factors)
	q := m / 4
	for i := range 4 {
		convolve(x[i*q:(i+1)*q], spectrum[i*q:(i+1)*q], factors, 4*b+i)
	}
	inversePass(x, m, b, factors)
}

func convolveLeaf(x, spectrum []complex128, factors []factor, b int) {
	first := b * len(x)
	for m := len(x); m > 16; m /= 4 {
		forwardPass(x, m, first/m, factors)
	}
	multiply(x, spectrum, factors, first/16)
	for m := 64; m <= len(x); m *= 4 {
		inversePass(x, m, first/m, factors)
	}
}

// multiply does the last two forward passes, the product and the first two
// inverse passes in one sweep, since all of them work within the same sixteen
// points.
func multiply(x, spectrum []complex128, factors []factor, b int) {
	for ; len(x) >= 16; b++ {
		multiply16((*[16]complex128)(x), (*[16]complex128)(spectrum), &factors[b], (*[4]factor)(factors[4*b:]))
		x, spectrum = x[16:], spectrum[16:]
	}
}

func multiply16(x, h *[16]complex128, w *factor, inner *[4]factor) {
	for i := range 4 {
		x[i], x[i+4], x[i+8], x[i+12] = split(x[i], w.w1*x[i+4], w.w2*x[i+8], w.w3*x[i+12])
	}
	for i := range inner {
		v := &inner[i]
		a, b, c, d := split(x[4*i], v.w1*x[4*i+1], v.w2*x[4*i+2], v.w3*x[4*i+3])
		a, b, c, d = join(a*h[4*i], b*h[4*i+1], c*h[4*i+2], d*h[4*i+3])
		x[4*i] = a
		x[4*i+1] = timesConj(b, v.w1)
		x[4*i+2] = timesConj(c, v.w2)
		x[4*i+3] = timesConj(d, v.w3)
	}
	for i := range 4 {
		a, b, c, d := join(x[i], x[i+4], x[i+8], x[i+12])
		x[i] = a
		x[i+4] = timesConj(b, w.w1)
		x[i+8] = timesConj(c, w.w2)
		x[i+12] = timesConj(d, w.w3)
	}
}
