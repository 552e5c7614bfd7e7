package pcm

import (
	"crypto/sha256"
	"encoding/binary"
	"math/bits"
)

// ditherLanes is how many generators take turns.
const ditherLanes = 8

// Dither is a reproducible stream of triangular random numbers for one channel
// of one output, in LSB. A number is the difference of two uniform ones of 32 bits
// each, in the open interval (-1, 1); its mean is 0, its variance (1 - 2^-64)/6.
//
// Number i comes from generator i mod 8, so that vectors can draw eight at once.
// Each generator is xoshiro256++ (Blackman and Vigna 2021, "Scrambled Linear
// Pseudorandom Number Generators", ACM Trans. Math. Softw. 47(4), article 36) with
// a seed of its own, 256 bits from a hash: that any two of a billion streams of
// 2^40 numbers overlap has a probability below 2^-150. Every release gives the
// same numbers, on every machine.
type Dither struct {
	state [4][ditherLanes]uint64 // word k of every generator
	turn  [ditherLanes]float64   // one number of each
	used  int                    // of turn
}

// ditherDomain keeps these seeds apart from any other use of the same hashes. A
// change of the generator must change it.
const ditherDomain = "fettle dither 2\x00"

// NewDither seeds the generators. The seed of generator j is the SHA-256 of the
// stream's hash and byte j; the stream's hash is the SHA-256 over the chain's
// hash, the channel (from 0) and the output's path, relative to the output folder
// and with slashes. Different arguments give independent streams, equal ones equal
// streams, whatever the machine and the order of work.
func NewDither(chain [32]byte, path string, channel int) *Dither {
	h := sha256.New()
	h.Write([]byte(ditherDomain))
	h.Write(chain[:])
	h.Write(binary.LittleEndian.AppendUint64(nil, uint64(channel)))
	h.Write([]byte(path))
	stream := h.Sum(nil)
	d := &Dither{used: ditherLanes}
	for j := range ditherLanes {
		seed := sha256.Sum256(append(stream, byte(j)))
		for k := range d.state {
			d.state[k][j] = binary.LittleEndian.Uint64(seed[8*k:])
		}
	}
	return d
}

// Fill sets dst to the next numbers. Any split of a stream into calls gives the
// same ones.
func (d *Dither) Fill(dst []float64) {
	n := copy(dst, d.turn[d.used:])
	d.used += n
	dst = dst[n:]
	whole := len(dst) / ditherLanes * ditherLanes
	d.draw(dst[:whole])
	if rest := dst[whole:]; len(rest) > 0 {
		d.draw(d.turn[:])
		d.used = copy(rest, d.turn[:])
	}
}

// drawGeneric lets every generator fill its places in whole turns.
func (d *Dither) drawGeneric(dst []float64) {
	for j := range ditherLanes {
		s := generator{d.state[0][j], d.state[1][j], d.state[2][j], d.state[3][j]}
		for i := j; i < len(dst); i += ditherLanes {
			dst[i] = triangular(s.next())
		}
		d.state[0][j], d.state[1][j], d.state[2][j], d.state[3][j] = s.s0, s.s1, s.s2, s.s3
	}
}

type generator struct{ s0, s1, s2, s3 uint64 }

// next is one step of xoshiro256++.
func (g *generator) next() uint64 {
	out := bits.RotateLeft64(g.s0+g.s3, 23) + g.s0
	t := g.s1 << 17
	g.s2 ^= g.s0
	g.s3 ^= g.s1
	g.s1 ^= g.s2
	g.s0 ^= g.s3
	g.s2 ^= t
	g.s3 = bits.RotateLeft64(g.s3, 45)
	return out
}

// triangular is the difference of the halves of u.
func triangular(u uint64) float64 {
	return float64(int64(u>>32)-int64(u&(1<<32-1))) * (1. / (1 << 32))
}
