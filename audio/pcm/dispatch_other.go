//go:build !amd64 || purego

package pcm

func decodeBulk([]float64, []byte, Encoding) int { return 0 }

func roundBulk(_ []byte, _, _ []float64, _ Encoding, _, _ float64) int { return 0 }

func floatBulk([]byte, []float64, Encoding) int { return 0 }

func (d *Dither) draw(dst []float64) { d.drawGeneric(dst) }

func pairsBulk(_, _, _ []float64) int { return 0 }

func unpairsBulk(_, _, _ []float64) int { return 0 }

func finiteBulk([]float64) int { return 0 }
