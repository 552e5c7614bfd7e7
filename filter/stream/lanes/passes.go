package lanes

import "fettle/filter/stream/internal/twiddle"

// The passes. x holds elements, an element being the real parts of one point in
// all lanes and then its imaginary parts: 2 lanes values. A pass of radix r
// looks at count blocks, one after another; a block is r rows, step elements
// from one to the next, of which it changes the first n elements. It does the
// same to every lane. w points to the factors of the first block, and each
// block has its own.
//
// The functions ...Generic are the contract. In a lane, with a, b, c, d the
// points at the same place of the rows and w1, w2, w3 the block's factors:
//
//	split2  a, b = a + w2 b, a - w2 b
//	join2   a, b = a + b, (a - b) conj(w2)
//	split4  evaluate a + w1 b z + w2 c z^2 + w3 d z^3 at z = 1, -1, -j, j
//	join4   undo split4, but for a factor of four
//	product split4, times the spectrum, join4, in blocks of four points
//
// Products may be fused with the sum they enter, or not.

func split2Generic(x []float64, lanes, step, n, count int, w []twiddle.Factor) {
	for b := range count {
		block := x[b*4*lanes*step:]
		x0, x1 := row(block, lanes, 0, step, n), row(block, lanes, 1, step, n)
		x1 = x1[:len(x0)] // spares the loop its bounds checks
		wr, wi := real(w[b].W2), imag(w[b].W2)
		for i := 0; i < len(x0); i += 2 * lanes {
			for r := i; r < i+lanes; r++ {
				m := r + lanes
				br, bi := times(x1[r], x1[m], wr, wi)
				x0[r], x0[m], x1[r], x1[m] = x0[r]+br, x0[m]+bi, x0[r]-br, x0[m]-bi
			}
		}
	}
}

func join2Generic(x []float64, lanes, step, n, count int, w []twiddle.Factor) {
	for b := range count {
		block := x[b*4*lanes*step:]
		x0, x1 := row(block, lanes, 0, step, n), row(block, lanes, 1, step, n)
		x1 = x1[:len(x0)]
		wr, wi := real(w[b].W2), imag(w[b].W2)
		for i := 0; i < len(x0); i += 2 * lanes {
			for r := i; r < i+lanes; r++ {
				m := r + lanes
				ar, ai, br, bi := x0[r], x0[m], x1[r], x1[m]
				x0[r], x0[m] = ar+br, ai+bi
				x1[r], x1[m] = times(ar-br, ai-bi, wr, -wi)
			}
		}
	}
}

func split4Generic(x []float64, lanes, step, n, count int, w []twiddle.Factor) {
	for b := range count {
		x0, x1, x2, x3 := rows(x[b*8*lanes*step:], lanes, step, n)
		f := &w[b]
		for i := 0; i < len(x0); i += 2 * lanes {
			for r := i; r < i+lanes; r++ {
				m := r + lanes
				p0, p1, p2, p3 := split(complex(x0[r], x0[m]), f.W1*complex(x1[r], x1[m]), f.W2*complex(x2[r], x2[m]), f.W3*complex(x3[r], x3[m]))
				x0[r], x0[m], x1[r], x1[m] = real(p0), imag(p0), real(p1), imag(p1)
				x2[r], x2[m], x3[r], x3[m] = real(p2), imag(p2), real(p3), imag(p3)
			}
		}
	}
}

func join4Generic(x []float64, lanes, step, n, count int, w []twiddle.Factor) {
	for b := range count {
		x0, x1, x2, x3 := rows(x[b*8*lanes*step:], lanes, step, n)
		f := &w[b]
		for i := 0; i < len(x0); i += 2 * lanes {
			for r := i; r < i+lanes; r++ {
				m := r + lanes
				p0, p1, p2, p3 := join(complex(x0[r], x0[m]), complex(x1[r], x1[m]), complex(x2[r], x2[m]), complex(x3[r], x3[m]))
				x0[r], x0[m] = real(p0), imag(p0)
				x1[r], x1[m] = times(real(p1), imag(p1), real(f.W1), -imag(f.W1))
				x2[r], x2[m] = times(real(p2), imag(p2), real(f.W2), -imag(f.W2))
				x3[r], x3[m] = times(real(p3), imag(p3), real(f.W3), -imag(f.W3))
			}
		}
	}
}

func productGeneric(x []float64, lanes, count int, spectrum []complex128, w []twiddle.Factor) {
	for b := range count {
		re0, im0, re1, im1 := pair(x[b*8*lanes:], lanes)
		re2, im2, re3, im3 := pair(x[b*8*lanes+4*lanes:], lanes)
		h, f := (*[4]complex128)(spectrum[4*b:]), &w[b]
		for l := range re0 {
			p0, p1, p2, p3 := split(complex(re0[l], im0[l]), f.W1*complex(re1[l], im1[l]), f.W2*complex(re2[l], im2[l]), f.W3*complex(re3[l], im3[l]))
			p0, p1, p2, p3 = join(p0*h[0], p1*h[1], p2*h[2], p3*h[3])
			re0[l], im0[l] = real(p0), imag(p0)
			re1[l], im1[l] = times(real(p1), imag(p1), real(f.W1), -imag(f.W1))
			re2[l], im2[l] = times(real(p2), imag(p2), real(f.W2), -imag(f.W2))
			re3[l], im3[l] = times(real(p3), imag(p3), real(f.W3), -imag(f.W3))
		}
	}
}

// pair returns two elements, in a way that shows the compiler that all parts are
// of one length.
func pair(x []float64, lanes int) (re0, im0, re1, im1 []float64) {
	return x[:lanes:lanes], x[lanes:][:lanes:lanes], x[2*lanes:][:lanes:lanes], x[3*lanes:][:lanes:lanes]
}

// split evaluates a + b z + c z^2 + d z^3 at z = 1, -1, -j and j: the points
// of a four-point transform in bit-reversed order.
func split(a, b, c, d complex128) (y0, y1, y2, y3 complex128) {
	s, t := a+c, b+d
	u, v := a-c, b-d
	return s + t, s - t,
		complex(real(u)+imag(v), imag(u)-real(v)),
		complex(real(u)-imag(v), imag(u)+real(v))
}

// join undoes split, but for a factor of four.
func join(a, b, c, d complex128) (y0, y1, y2, y3 complex128) {
	s, t := a+b, c+d
	u, v := a-b, c-d
	return s + t,
		complex(real(u)-imag(v), imag(u)+real(v)),
		s - t,
		complex(real(u)+imag(v), imag(u)-real(v))
}

// times is a complex product.
func times(ar, ai, br, bi float64) (re, im float64) { return ar*br - ai*bi, ai*br + ar*bi }

// row returns the first n elements of row i.
func row(block []float64, lanes, i, step, n int) []float64 {
	return block[i*2*lanes*step:][:2*lanes*n]
}

// rows returns the first n elements of four rows, in a way that shows the
// compiler that they are of one length.
func rows(block []float64, lanes, step, n int) (x0, x1, x2, x3 []float64) {
	x0 = row(block, lanes, 0, step, n)
	x1, x2, x3 = row(block, lanes, 1, step, n), row(block, lanes, 2, step, n), row(block, lanes, 3, step, n)
	return x0, x1[:len(x0)], x2[:len(x0)], x3[:len(x0)]
}
