package design

import (
	"math"
	"slices"

	"gonum.org/v1/gonum/mat"
)

const (
	correctionPairs  = 3
	correctionPoints = 64
	correctionSteps  = 60

	// Where a lack is small, poles and zeros must meet almost, and the first
	// step of less damping goes astray.
	firstDamping = 0.1
	leastDamping = 1e-6
)

// correction is prod(1 - zeros[i]/z)/prod(1 - poles[i]/z), all in (-1, 0).
type correction struct{ zeros, poles []float64 }

// correctionStart holds log(a - 1) of the poles' and then the zeros' places a in
// phi: the fit of a long time constant alone, to whose shape all others are
// near.
var correctionStart = [2 * correctionPairs]float64{-5.18, -2.44, 0.03, -5.09, -2.15, 1.25}

// fitCorrection fits log|H|^2 of a correction to a function of omega that is 0 at
// 0. At equal angles of a quarter circle, whose sine times the reach is the
// frequency, least squares come close to the least maximum.
//
// A lack that falls is fitted as its opposite, poles and zeros swapped, so that
// a curve and its inverse get the same roots.
func fitCorrection(lack func(omega float64) float64) correction {
	fit := newCorrectionFit(lack)
	falls := fit.want[correctionPoints-1] < 0
	if falls {
		for i := range fit.want {
			fit.want[i] = -fit.want[i]
		}
	}
	places := fit.levenbergMarquardt()
	c := correction{zeros: negativeRoots(places[correctionPairs:]), poles: negativeRoots(places[:correctionPairs])}
	if falls {
		c.zeros, c.poles = c.poles, c.zeros
	}
	return c
}

// negativeRoots turns places a = 1 + e^u in phi into the roots z inside the
// circle with (2 - z - 1/z)/4 = a.
func negativeRoots(logs []float64) []float64 {
	roots := make([]float64, len(logs))
	for i, u := range logs {
		beyond := math.Exp(u)
		sum := math.Sqrt(1+beyond) + math.Sqrt(beyond)
		roots[i] = -1 / (sum * sum)
	}
	return roots
}

// correctionFit is the least-squares problem: values wanted at phi.
type correctionFit struct{ phi, want []float64 }

func newCorrectionFit(lack func(omega float64) float64) correctionFit {
	fit := correctionFit{make([]float64, correctionPoints), make([]float64, correctionPoints)}
	for i := range fit.phi {
		angle := math.Pi / 2 * (float64(i) + 0.5) / correctionPoints
		omega := 2 * math.Pi * replayReach * math.Sin(angle)
		fit.phi[i], fit.want[i] = phiAt(omega), lack(omega)
	}
	return fit
}

// countsAs is the sign with which factor k counts in log|H|^2: poles first.
func countsAs(k int) float64 {
	if k < correctionPairs {
		return -1
	}
	return 1
}

// errors returns what is wanted less what u gives, and the sum of squares.
func (fit correctionFit) errors(u []float64) (e []float64, square float64) {
	e = make([]float64, len(fit.phi))
	for i, phi := range fit.phi {
		e[i] = fit.want[i]
		for k, log := range u {
			e[i] -= countsAs(k) * math.Log1p(-phi/(1+math.Exp(log)))
		}
		square += e[i] * e[i]
	}
	return e, square
}

// levenbergMarquardt minimises the squares from correctionStart (Nocedal &
// Wright, Numerical Optimization, section 10.3): a damped Gauss-Newton step,
// taken if it is downhill. It ends when a step gains less than a millionth.
func (fit correctionFit) levenbergMarquardt() []float64 {
	u := slices.Clone(correctionStart[:])
	e, square := fit.errors(u)
	damping := firstDamping
	for range correctionSteps {
		tried := fit.step(u, e, damping)
		triedErrors, triedSquare := fit.errors(tried)
		if !(triedSquare < square) {
			damping *= 8
			continue
		}
		gained := square - triedSquare
		u, e, square = tried, triedErrors, triedSquare
		if gained < 1e-6*square {
			break
		}
		damping = math.Max(damping/8, leastDamping)
	}
	return u
}

// step solves (J'J + damping^2) d = J'e by orthogonal factors, and returns u + d,
// each log kept within +-14: places of 1e-6 to 1e6 beyond 1.
func (fit correctionFit) step(u, e []float64, damping float64) []float64 {
	rows, columns := len(e), len(u)
	system := mat.NewDense(rows+columns, columns, nil)
	right := mat.NewVecDense(rows+columns, nil)
	for i, phi := range fit.phi {
		right.SetVec(i, e[i])
		for k, log := range u {
			beyond := math.Exp(log)
			system.Set(i, k, countsAs(k)*phi*beyond/((1+beyond)*(1+beyond-phi)))
		}
	}
	for k := range u {
		system.Set(rows+k, k, damping)
	}
	var qr mat.QR
	qr.Factorize(system)
	var d mat.VecDense
	if err := qr.SolveVecTo(&d, false, right); err != nil {
		panic("design: the damped system of a replay curve has lost rank: " + err.Error())
	}
	next := make([]float64, columns)
	for k := range next {
		next[k] = math.Max(-14, math.Min(14, u[k]+d.AtVec(k)))
	}
	return next
}
