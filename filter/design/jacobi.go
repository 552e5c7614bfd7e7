package design

import "math"

// completeK returns the complete elliptic integral of the first kind for a
// complementary modulus, 0 < complement <= 1, by the arithmetic-geometric mean
// (Abramowitz & Stegun, 17.6.3).
func completeK(complement float64) float64 {
	a, g := 1.0, complement
	for math.Abs(a-g) > 1e-15*a {
		a, g = (a+g)/2, math.Sqrt(a*g)
	}
	return math.Pi / (a + g)
}

// incompleteF returns the elliptic integral of the first kind for
// tan(amplitude) = t > 0 and the given complementary modulus: as Carlson's
// symmetric RF(1, 1 + (k' t)^2, 1 + t^2) t (Carlson, Numerische Mathematik 33,
// 1979), in which nothing cancels when the modulus is next to 1.
func incompleteF(t, complement float64) float64 {
	return t * carlsonRF(1, 1+complement*complement*t*t, 1+t*t)
}

// carlsonRF duplicates its arguments until they agree, then sums its series.
func carlsonRF(x, y, z float64) float64 {
	for {
		mean := (x + y + z) / 3
		dx, dy := 1-x/mean, 1-y/mean
		dz := -dx - dy
		if math.Max(math.Abs(dx), math.Max(math.Abs(dy), math.Abs(dz))) < 1e-3 {
			e2, e3 := dx*dy-dz*dz, dx*dy*dz
			series := 1 - e2/10 + e3/14 + e2*e2/24 - 3*e2*e3/44
			return series / math.Sqrt(mean)
		}
		lambda := math.Sqrt(x*y) + math.Sqrt(y*z) + math.Sqrt(z*x)
		x, y, z = (x+lambda)/4, (y+lambda)/4, (z+lambda)/4
	}
}

// jacobi returns sn, cn and dn of a real argument for a modulus and its
// complement, by descending Landen transformation (Abramowitz & Stegun, 16.4).
func jacobi(u, modulus, complement float64) (sn, cn, dn float64) {
	var ratios []float64
	a, g, c := 1.0, complement, modulus
	scale := 1.0
	for c > 2e-16*a {
		a, g, c = (a+g)/2, math.Sqrt(a*g), (a-g)/2
		ratios = append(ratios, c/a)
		scale *= 2
	}
	amplitude := scale * a * u
	for i := len(ratios) - 1; i >= 0; i-- {
		amplitude = (amplitude + math.Asin(ratios[i]*math.Sin(amplitude))) / 2
	}
	sn, cn = math.Sincos(amplitude)
	// k'^2 + k^2 cn^2 is 1 - k^2 sn^2 without the cancellation near k = 1.
	return sn, cn, math.Sqrt(complement*complement + modulus*modulus*cn*cn)
}
