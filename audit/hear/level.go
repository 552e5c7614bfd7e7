package hear

import (
	"math"

	"fettle/audio"
	"fettle/audio/loudness"
)

// CeilingDB is the highest true peak of a player, in dBTP: what stands 1 dB under full
// scale is usual for what others play (common practice, no source).
const CeilingDB = -1.0

func meterOf(frames []float64, s span) (*loudness.Meter, error) {
	m, err := loudness.NewMeter(s.recorded, len(s.channels))
	if err == nil {
		m.Add(frames)
	}
	return m, err
}

// over is by how many dB an excerpt is louder than another.
func over(a, b *loudness.Meter) (db float64, by Match) {
	if db = a.Over(b); !math.IsNaN(db) {
		return db, ByLoudness
	}
	if db = a.Ungated() - b.Ungated(); !math.IsNaN(db) && !math.IsInf(db, 0) {
		return db, ByEnergy
	}
	return 0, Unmatched
}

func peakOf(frames []float64, channels int) *audio.Meter {
	m := audio.NewMeter(channels)
	m.Add(frames)
	return m
}

// attenuation is by how many dB all must be lowered so that none exceeds the ceiling.
func attenuation(peaks []*audio.Meter) float64 {
	top := 0.0
	for _, p := range peaks {
		top = max(top, p.TruePeak())
	}
	return max(0, audio.DB(top)-CeilingDB)
}

func fromDB(db float64) float64 { return math.Pow(10, db/20) }
