package onsets

import (
	"cmp"
	"math"
	"slices"
)

// ranking keeps the strongest onsets in bounded memory.
type ranking struct {
	count  int
	apart  float64
	most   int // onsets that must be kept so that the list is right
	onsets []Onset
}

// newRanking is for the onsets of so many channels. Those of one channel are never
// nearer than quiet, so each that is listed can rule out only so many others.
func newRanking(count int, apart float64, channels int) *ranking {
	apart = max(apart, 0)
	around := 2*int(math.Ceil(apart/quiet)) + 1
	return &ranking{count: count, apart: apart, most: count * around * channels}
}

func (r *ranking) add(o Onset) {
	if r.count == 0 {
		return
	}
	r.onsets = append(r.onsets, o)
	if len(r.onsets) >= 2*r.most {
		r.sort()
		r.onsets = r.onsets[:r.most]
	}
}

// sort puts the strongest first, of equals the earliest, of one instant the first
// channel's.
func (r *ranking) sort() {
	slices.SortFunc(r.onsets, func(a, b Onset) int {
		return cmp.Or(cmp.Compare(b.Level, a.Level), cmp.Compare(a.Time, b.Time), cmp.Compare(a.Channel, b.Channel))
	})
}

// list is the strongest of them.
func (r *ranking) list() []Onset {
	r.sort()
	var list []Onset
	for _, o := range r.onsets {
		near := slices.ContainsFunc(list, func(other Onset) bool { return math.Abs(o.Time-other.Time) < r.apart })
		if !near && len(list) < r.count {
			list = append(list, o)
		}
	}
	return list
}
