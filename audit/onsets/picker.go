package onsets

// The picker's figures: a peak stands out of pickSpan frames either way, and by
// pickOver dB out of the mean of pickBefore frames before it and pickAfter after.
const (
	pickSpan   = 3
	pickBefore = 10
	pickAfter  = 7
	pickOver   = 1.0
)

// picker finds the peaks of a detection function that comes a value at a time.
type picker struct {
	values [pickBefore + 1 + pickAfter]float64 // the latest last
	pushed int
}

// push takes the next value. It tells whether the value pickAfter before it was a
// peak.
func (p *picker) push(v float64) bool {
	copy(p.values[:], p.values[1:])
	p.values[len(p.values)-1] = v
	p.pushed++
	return p.pushed > pickAfter && p.isPeak()
}

func (p *picker) isPeak() bool {
	v := p.values[pickBefore]
	for i := 1; i <= pickSpan; i++ {
		if p.values[pickBefore-i] >= v || p.values[pickBefore+i] > v {
			return false
		}
	}
	var sum float64
	for _, w := range p.values {
		sum += w
	}
	// Before the first value the function was 0.
	return v >= sum/float64(len(p.values))+pickOver
}
