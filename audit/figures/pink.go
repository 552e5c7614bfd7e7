package figures

import (
	"math"
	"sync"

	"fettle/filter/response"
)

// pinkMagnitude is the weighting's magnitude at f Hz: 1/√f, flat below 20 Hz.
func pinkMagnitude(f float64) float64 { return 1 / math.Sqrt(max(f, response.PinkFrom)) }

// pinkSeconds is where the weighting's response is cut: 0.02 dB are lost at the corner at
// 20 Hz, whose ringing decays as 1/t², and less than 0.003 dB from 22 Hz up.
const pinkSeconds = 0.5

// pinkFilters are those made so far, each in a function that makes it once: one is a
// sixth of the work on a short response, and takes 0.2 MB at 48 kHz.
var pinkFilters sync.Map // by rate

// pinkFilter is the minimum-phase response of pinkMagnitude at a sample rate, from
// the folded cepstrum. Exactly causal: it is cut, never wrapped.
func pinkFilter(rate float64) []float64 {
	made, _ := pinkFilters.LoadOrStore(rate, sync.OnceValue(func() []float64 { return newPinkFilter(rate) }))
	return made.(func() []float64)()
}

func newPinkFilter(rate float64) []float64 {
	n := fastLength(int(8 * pinkSeconds * rate))
	logs := make([]float64, n/2+1)
	for k := range logs {
		logs[k] = math.Log(pinkMagnitude(float64(k) * rate / float64(n)))
	}
	return response.MinimumPhase(logs, int(pinkSeconds*rate)+1)
}
