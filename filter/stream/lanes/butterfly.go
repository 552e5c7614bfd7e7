package lanes

// forwardPass splits every block of m points in x into quarters. The first
// block is number b of its level.
func forwardPass(x []complex128, m, b int, factors []factor) {
	for ; len(x) > 0; x = x[m:] {
		if b == 0 {
			splitPlain(x[:m])
		} else {
			splitTwiddled(x[:m], factors[b])
		}
		b++
	}
}

// inversePass undoes forwardPass, but for a factor of four.
func inversePass(x []complex128, m, b int, factors []factor) {
	for ; len(x) > 0; x = x[m:] {
		if b == 0 {
			joinPlain(x[:m])
		} else {
			joinTwiddled(x[:m], &factors[b])
		}
		b++
	}
}

func splitPlain(x []complex128) {
	x0, x1, x2, x3 := quarters(x)
	x1, x2, x3 = x1[:len(x0)], x2[:len(x0)], x3[:len(x0)] // spares the loop its bounds checks
	for i := range x0 {
		x0[i], x1[i], x2[i], x3[i] = split(x0[i], x1[i], x2[i], x3[i])
	}
}

func splitTwiddled(x []complex128, w factor) {
	x0, x1, x2, x3 := quarters(x)
	x1, x2, x3 = x1[:len(x0)], x2[:len(x0)], x3[:len(x0)]
	for i := range x0 {
		x0[i], x1[i], x2[i], x3[i] = split(x0[i], w.w1*x1[i], w.w2*x2[i], w.w3*x3[i])
	}
}

func joinPlain(x []complex128) {
	x0, x1, x2, x3 := quarters(x)
	x1, x2, x3 = x1[:len(x0)], x2[:len(x0)], x3[:len(x0)]
	for i := range x0 {
		x0[i], x1[i], x2[i], x3[i] = join(x0[i], x1[i], x2[i], x3[i])
	}
}

// joinTwiddled loads each factor after the store before it, and so keeps its
// values in registers: 9 % of the whole convolver's speed.
func joinTwiddled(x []complex128, w *factor) {
	x0, x1, x2, x3 := quarters(x)
	x1, x2, x3 = x1[:len(x0)], x2[:len(x0)], x3[:len(x0)]
	for i := range x0 {
		a, b, c, d := join(x0[i], x1[i], x2[i], x3[i])
		x0[i] = a
		x1[i] = timesConj(b, w.w1)
		x2[i] = timesConj(c, w.w2)
		x3[i] = timesConj(d, w.w3)
	}
}

func quarters[T any](x []T) (x0, x1, x2, x3 []T) {
	q := len(x) / 4
	return x[:q], x[q : 2*q], x[2*q : 3*q], x[3*q:]
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

// timesConj returns x times the conjugate of w.
func timesConj(x, w complex128) complex128 {
	return complex(real(x)*real(w)+imag(x)*imag(w), imag(x)*real(w)-real(x)*imag(w))
}
