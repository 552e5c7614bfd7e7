package limits

import "fmt"

// masked is said of every interval of temporal masking.
const masked = "Sources on masking differ tenfold, and by level, duration and training. They give times and no level: that energy counts until it is 60 dB under the whole is this program's choice."

func preMasking(ms float64, source string) Limit {
	return masking("pre", ms, source, preRing,
		"Derived for sounds just ahead of a louder one: under 2 ms may be taken as masked, 2 to 20 ms as doubtful, beyond as unmasked.")
}

func postMasking(ms float64, source string) Limit {
	return masking("post", ms, source, postRing,
		"Derived for sounds after a louder one: up to 50 ms may be taken as masked, up to 200 ms as partly masked.")
}

func masking(which string, ms float64, source string, r ringOf, help string) Limit {
	return Limit{
		Name: fmt.Sprintf("%s-masking-%gms", which, ms), Source: source, Status: Published,
		Measure: r.lengthMeasure(), Help: help + " " + masked,
		unit: "ms", judge: judgeReadings(r.length(both), toMS, func(float64) float64 { return ms }),
	}
}
