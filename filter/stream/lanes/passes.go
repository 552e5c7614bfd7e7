package lanes

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

func split2Generic(x []float64, lanes, step, n, count int, w []twiddle) {
	for b := range count {
		block := x[b*4*lanes*step:]
		x0, x1 := row(block, lanes, 0, step, n), row(block, lanes, 1, step, n)
		x1 = x1[:len(x0)] // spares the loop its bounds checks
		wr, wi := real(w[b].w2), imag(w[b].w2)
		for i := 0; i < len(x0); i += 2 * lanes {
			for r := i; r < i+lanes; r++ {
				m := r + lanes
				br, bi := times(x1[r], x1[m], wr, wi)
				x0[r], x0[m], x1[r], x1[m] = x0[r]+br, x0[m]+bi, x0[r]-br, x0[m]-bi
			}
		}
	}
}

func join2Generic(x []float64, lanes, step, n, count int, w []twiddle) {
	for b := range count {
		block := x[b*4*lanes*step:]
		x0, x1 := row(block, lanes, 0, step, n), row(block, lanes, 1, step, n)
		x1 = x1[:len(x0)]
		wr, wi := real(w[b].w2), imag(w[b].w2)
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

func split4Generic(x []float64, lanes, step, n, count int, w []twiddle) {
	for b := range count {
		x0, x1, x2, x3 := rows(x[b*8*lanes*step:], lanes, step, n)
		f := w[b]
		for i := 0; i < len(x0); i += 2 * lanes {
			for r := i; r < i+lanes; r++ {
				m := r + lanes
				br, bi := times(x1[r], x1[m], real(f.w1), imag(f.w1))
				cr, ci := times(x2[r], x2[m], real(f.w2), imag(f.w2))
				dr, di := times(x3[r], x3[m], real(f.w3), imag(f.w3))
				sr, si, ur, ui := x0[r]+cr, x0[m]+ci, x0[r]-cr, x0[m]-ci
				tr, ti, vr, vi := br+dr, bi+di, br-dr, bi-di
				x0[r], x0[m], x1[r], x1[m] = sr+tr, si+ti, sr-tr, si-ti
				x2[r], x2[m], x3[r], x3[m] = ur+vi, ui-vr, ur-vi, ui+vr
			}
		}
	}
}

func join4Generic(x []float64, lanes, step, n, count int, w []twiddle) {
	for b := range count {
		x0, x1, x2, x3 := rows(x[b*8*lanes*step:], lanes, step, n)
		f := w[b]
		for i := 0; i < len(x0); i += 2 * lanes {
			for r := i; r < i+lanes; r++ {
				m := r + lanes
				sr, si, ur, ui := x0[r]+x1[r], x0[m]+x1[m], x0[r]-x1[r], x0[m]-x1[m]
				tr, ti, vr, vi := x2[r]+x3[r], x2[m]+x3[m], x2[r]-x3[r], x2[m]-x3[m]
				x0[r], x0[m] = sr+tr, si+ti
				x1[r], x1[m] = times(ur-vi, ui+vr, real(f.w1), -imag(f.w1))
				x2[r], x2[m] = times(sr-tr, si-ti, real(f.w2), -imag(f.w2))
				x3[r], x3[m] = times(ur+vi, ui-vr, real(f.w3), -imag(f.w3))
			}
		}
	}
}

func productGeneric(x []float64, lanes, count int, spectrum []complex128, w []twiddle) {
	for b := range count {
		block, f := x[b*8*lanes:(b+1)*8*lanes], w[b:b+1]
		split4Generic(block, lanes, 1, 1, 1, f)
		for i, h := range spectrum[4*b : 4*b+4] {
			re, im := block[2*lanes*i:][:lanes], block[2*lanes*i+lanes:][:lanes]
			for l := range re {
				re[l], im[l] = times(re[l], im[l], real(h), imag(h))
			}
		}
		join4Generic(block, lanes, 1, 1, 1, f)
	}
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
