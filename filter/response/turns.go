package response

// Turns is e^(j step n) for one n after another.
type Turns struct {
	step     float64
	n        int
	now, one complex128
}

// NewTurns begins at n = first.
func NewTurns(step float64, first int) *Turns {
	return &Turns{step: step, n: first, now: turn(step * float64(first)), one: turn(step)}
}

// resync is how many steps a rotation by repeated multiplication may run before
// it is set right again: its error grows by about 1e-16 a step.
const resync = 512

// Next is the value at the next n.
func (t *Turns) Next() complex128 {
	now := t.now
	if t.n++; t.n%resync == 0 {
		t.now = turn(t.step * float64(t.n))
	} else {
		t.now *= t.one
	}
	return now
}
