package lanes

import "math/bits"

// load does the outermost forward pass, taking the block from the two signals
// that are its real and imaginary part. It returns into how many parts, 2 or
// 4, the block is split.
func load(x []complex128, re, im []float64) int {
	if oddPower(len(x)) {
		loadHalves(x, re, im)
		return 2
	}
	loadQuarters(x, re, im)
	return 4
}

// store does the outermost inverse pass.
func store(re, im []float64, x []complex128) {
	if oddPower(len(x)) {
		storeHalves(re, im, x)
		return
	}
	storeQuarters(re, im, x)
}

func oddPower(n int) bool { return bits.TrailingZeros(uint(n))%2 == 1 }

func loadHalves(x []complex128, re, im []float64) {
	half := len(x) / 2
	x0, x1 := x[:half], x[half:][:half]
	re0, re1 := re[:half], re[half:][:half]
	im0, im1 := im[:half], im[half:][:half]
	for i := range x0 {
		x0[i] = complex(re0[i]+re1[i], im0[i]+im1[i])
		x1[i] = complex(re0[i]-re1[i], im0[i]-im1[i])
	}
}

func loadQuarters(x []complex128, re, im []float64) {
	x0, x1, x2, x3 := quarters(x)
	re0, re1, re2, re3 := quarters(re)
	im0, im1, im2, im3 := quarters(im)
	n := len(x0)
	x1, x2, x3 = x1[:n], x2[:n], x3[:n]
	re0, re1, re2, re3 = re0[:n], re1[:n], re2[:n], re3[:n]
	im0, im1, im2, im3 = im0[:n], im1[:n], im2[:n], im3[:n]
	for i := range x0 {
		x0[i], x1[i], x2[i], x3[i] = split(
			complex(re0[i], im0[i]), complex(re1[i], im1[i]),
			complex(re2[i], im2[i]), complex(re3[i], im3[i]))
	}
}

func storeHalves(re, im []float64, x []complex128) {
	half := len(x) / 2
	x0, x1 := x[:half], x[half:][:half]
	re0, re1 := re[:half], re[half:][:half]
	im0, im1 := im[:half], im[half:][:half]
	for i := range x0 {
		a, b := x0[i]+x1[i], x0[i]-x1[i]
		re0[i], im0[i] = real(a), imag(a)
		re1[i], im1[i] = real(b), imag(b)
	}
}

func storeQuarters(re, im []float64, x []complex128) {
	x0, x1, x2, x3 := quarters(x)
	re0, re1, re2, re3 := quarters(re)
	im0, im1, im2, im3 := quarters(im)
	n := len(x0)
	x1, x2, x3 = x1[:n], x2[:n], x3[:n]
	re0, re1, re2, re3 = re0[:n], re1[:n], re2[:n], re3[:n]
	im0, im1, im2, im3 = im0[:n], im1[:n], im2[:n], im3[:n]
	for i := range x0 {
		a, b, c, d := join(x0[i], x1[i], x2[i], x3[i])
		re0[i], im0[i] = real(a), imag(a)
		re1[i], im1[i] = real(b), imag(b)
		re2[i], im2[i] = real(c), imag(c)
		re3[i], im3[i] = real(d), imag(d)
	}
}
