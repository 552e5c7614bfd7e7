package lanes

import "fmt"

// Load lays signals out for Convolve: signals[l] becomes the real part of block
// l, signals[Lanes()+l] the imaginary part. Each has Size() samples, or is nil
// for silence. x is as Convolve takes it; what was in it is gone.
//
// It panics if the number of signals is not 2 Lanes() or a length differs.
func (p *Plan) Load(x []float64, signals [][]float64) {
	p.checkShape("Load", x, signals)
	for s, signal := range signals {
		if signal != nil && len(signal) != p.size {
			panic(fmt.Sprintf("lanes: Load with %d samples in signal %d: a block has %d", len(signal), s, p.size))
		}
	}
	// In stretches, so that those of all signals are in a near cache together.
	for at := 0; at < p.size; at += stretch {
		n := min(stretch, p.size-at)
		for s := 0; s < len(signals); s += 4 {
			group := cut(signals[s:s+4], at, silence[:n])
			p.interleave4(p.from(x, at)[s:], 2*p.lanes, &group)
		}
	}
}

// Store is the inverse of Load, for the ends of the blocks: signals[l] gets the
// last len(signals[l]) real parts of block l, signals[Lanes()+l] imaginary parts.
// They are of one length, at most Size(); nil stands for one that is not wanted.
//
// It panics if the number of signals is not 2 Lanes() or a length is out of range.
func (p *Plan) Store(signals [][]float64, x []float64) {
	p.checkShape("Store", x, signals)
	keep := p.kept(signals)
	var unwanted [stretch]float64
	for at := 0; at < keep; at += stretch {
		n := min(stretch, keep-at)
		for s := 0; s < len(signals); s += 4 {
			group := cut(signals[s:s+4], at, unwanted[:n])
			p.deinterleave4(&group, p.from(x, p.size-keep+at)[s:], 2*p.lanes)
		}
	}
}

// cut returns a stretch of four signals, as long as instead, which stands for
// those that are nil.
func cut(signals [][]float64, at int, instead []float64) (group [4][]float64) {
	for i, signal := range signals {
		group[i] = instead
		if signal != nil {
			group[i] = signal[at:][:len(instead)]
		}
	}
	return group
}

// stretch is in points. 32 to 256 measure alike.
const stretch = 256

var silence [stretch]float64 // never written to

func (p *Plan) checkShape(what string, x []float64, signals [][]float64) {
	p.checkLength(what, x)
	if len(signals) != 2*p.lanes {
		panic(fmt.Sprintf("lanes: %s with %d signals: %d blocks have %d", what, len(signals), p.lanes, 2*p.lanes))
	}
}

// kept returns the common length of the signals that are wanted, 0 if none is.
func (p *Plan) kept(signals [][]float64) int {
	keep, first := 0, true
	for s, signal := range signals {
		if signal == nil {
			continue
		}
		if len(signal) > p.size || !first && len(signal) != keep {
			panic(fmt.Sprintf("lanes: %d samples to store in signal %d: all must be of one length, at most %d", len(signal), s, p.size))
		}
		keep, first = len(signal), false
	}
	return keep
}

// interleave4Generic sets x[step*k+i] to signals[i][k].
func interleave4Generic(x []float64, step int, signals *[4][]float64) {
	a, b, c, d := equalLengths(signals)
	for k := range a {
		y := (*[4]float64)(x[step*k:])
		y[0], y[1], y[2], y[3] = a[k], b[k], c[k], d[k]
	}
}

// deinterleave4Generic sets signals[i][k] to x[step*k+i].
func deinterleave4Generic(signals *[4][]float64, x []float64, step int) {
	a, b, c, d := equalLengths(signals)
	for k := range a {
		y := (*[4]float64)(x[step*k:])
		a[k], b[k], c[k], d[k] = y[0], y[1], y[2], y[3]
	}
}

// equalLengths shows the compiler that all are of one length.
func equalLengths(s *[4][]float64) (a, b, c, d []float64) {
	n := len(s[0])
	return s[0], s[1][:n], s[2][:n], s[3][:n]
}
