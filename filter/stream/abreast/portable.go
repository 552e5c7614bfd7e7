package abreast

// portable has the shapes of plain Go, for every machine.
//
// Two recurrences that do not wait for each other within a sample, or only for
// one value, take hardly longer than one; for four there are too few registers.
var portable = []shape{{1, 1, nil}, {2, 1, nil}, {1, 2, nil}}

// plain is chain in plain Go.
func (p *pass) plain(dst, src [][]float64, from, to, flush int) {
	for at := from; at < to; {
		if at == from+flush {
			quieten(p.states())
			flush += Period
		}
		next := min(to, from+flush)
		switch {
		case p.channels == 2:
			p.pair(dst[0][at:next], dst[1][at:next], src[0][at:next], src[1][at:next])
		case p.sections == 2:
			p.two(dst[0][at:next], src[0][at:next])
		default:
			p.one(dst[0][at:next], src[0][at:next])
		}
		at = next
	}
}

// quietest is -600 dB full scale.
const quietest = 1e-30

func quieten(states []float64) {
	for i, s := range states {
		if -quietest < s && s < quietest {
			states[i] = 0
		}
	}
}

// section is the coefficients in a lane.
type section struct{ b0, c1, c2, a1, a2 float64 }

// state is what a lane remembers.
type state struct{ r, q, e float64 }

func (p *pass) section(place int) section {
	lane := p.lane(place, 0)
	return section{*p.at(rowB0, lane), *p.at(rowC1, lane), *p.at(rowC2, lane), *p.at(rowA1, lane), *p.at(rowA2, lane)}
}

func (p *pass) load(place, channel int) state {
	lane := p.lane(place, channel)
	return state{*p.at(rowR, lane), *p.at(rowQ, lane), *p.at(rowE, lane)}
}

func (p *pass) save(place, channel int, s state) {
	lane := p.lane(place, channel)
	*p.at(rowR, lane), *p.at(rowQ, lane), *p.at(rowE, lane) = s.r, s.q, s.e
}

// step takes one sample through a section. The conversions keep products from
// being fused with sums, so that every machine gives the same bits.
func (c *section) step(x float64, s state) (float64, state) {
	y := float64(c.b0*x) + s.r
	r := float64(c.c1*x) + s.e - float64(c.a2*s.q) - float64(c.a1*s.r)
	return y, state{r, s.r, float64(c.c2 * x)}
}

func (p *pass) one(y, x []float64) {
	c, s := p.section(0), p.load(0, 0)
	y = y[:len(x)]
	for i, v := range x {
		y[i], s = c.step(v, s)
	}
	p.save(0, 0, s)
}

func (p *pass) two(y, x []float64) {
	c, d := p.section(0), p.section(1)
	s, t := p.load(0, 0), p.load(1, 0)
	y = y[:len(x)]
	for i, v := range x {
		v, s = c.step(v, s)
		y[i], t = d.step(v, t)
	}
	p.save(0, 0, s)
	p.save(1, 0, t)
}

func (p *pass) pair(y, z, x, w []float64) {
	c := p.section(0)
	s, t := p.load(0, 0), p.load(0, 1)
	w, y, z = w[:len(x)], y[:len(x)], z[:len(x)]
	for i, v := range x {
		y[i], s = c.step(v, s)
		z[i], t = c.step(w[i], t)
	}
	p.save(0, 0, s)
	p.save(0, 1, t)
}
