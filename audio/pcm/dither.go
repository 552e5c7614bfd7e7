package pcm

import (
	"crypto/sha256"
	"encoding/binary"
	"math/bits"
)

// Dither is a reproducible stream of triangular random numbers for one channel
// of one output. Its generator is xoshiro256++ (Blackman and Vigna 2021,
// "Scrambled Linear Pseudorandom Number Generators", ACM Trans. Math. Softw.
// 47(4), article 36): every release gives the same bytes.
type Dither struct {
	s0, s1, s2, s3 uint64
}

// ditherDomain keeps these seeds apart from any other use of the same hashes. A
// change of the generator must change it.
const ditherDomain = "fettle dither 1\x00"

// NewDither seeds a generator with SHA-256 over the chain's hash, the channel
// (from 0) and the output's path, relative to the output folder and with
// slashes. Different arguments give independent streams, equal ones equal
// streams, whatever the machine and the order of work.
func NewDither(chain [32]byte, path string, channel int) *Dither {
	h := sha256.New()
	h.Write([]byte(ditherDomain))
	h.Write(chain[:])
	h.Write(binary.LittleEndian.AppendUint64(nil, uint64(channel)))
	h.Write([]byte(path))
	sum := h.Sum(nil)
	le := binary.LittleEndian
	return &Dither{le.Uint64(sum), le.Uint64(sum[8:]), le.Uint64(sum[16:]), le.Uint64(sum[24:])}
}

// next64 is one step of xoshiro256++.
func (d *Dither) next64() uint64 {
	out := bits.RotateLeft64(d.s0+d.s3, 23) + d.s0
	t := d.s1 << 17
	d.s2 ^= d.s0
	d.s3 ^= d.s1
	d.s1 ^= d.s2
	d.s0 ^= d.s3
	d.s2 ^= t
	d.s3 = bits.RotateLeft64(d.s3, 45)
	return out
}

// Next is the next number in LSB, triangular in the open interval (-1, 1): the
// difference of two uniform numbers of 32 bits each. Its mean is 0, its
// variance (1 - 2^-64)/6.
func (d *Dither) Next() float64 {
	u := d.next64()
	return float64(int64(u>>32)-int64(u&(1<<32-1))) * (1. / (1 << 32))
}
