package design

// leastOdd returns the least odd length that meets, taking it that every
// longer one does. From start it steps outward, each step twice the last, until
// one length meets and one fails, then halves the bracket. A result above limit,
// which is odd, means that none up to there was found.
func leastOdd(start, limit int, meets func(n int) bool) int {
	fails, works := -1, max(1, min(start, limit))|1
	if meets(works) {
		for step := 2; works-step >= 1; step *= 2 {
			if !meets(works - step) {
				fails = works - step
				break
			}
			works -= step
		}
	} else {
		fails = works
		for step := 2; ; step *= 2 {
			if fails >= limit {
				return limit + 2
			}
			works = min(fails+step, limit)
			if meets(works) {
				break
			}
			fails = works
		}
	}
	for works-fails > 2 {
		if middle := fails + (works-fails)/4*2; meets(middle) {
			works = middle
		} else {
			fails = middle
		}
	}
	return works
}
