package choose

import (
	"math"
	"slices"

	"fettle/audit/limits"
)

// Judgement is what one purpose's limits say of one row.
type Judgement struct {
	Row      *Row
	Verdicts [][]limits.Verdict // one list a path of the row's filter
	Keeps    bool               // all limits
}

// Advice is which row serves a purpose.
type Advice struct {
	Rule Rule
	// Judged are all rows in the rule's order.
	Judged []Judgement
	// Chosen is the first that keeps all limits; nil: none does.
	Chosen *Judgement
}

// advise judges rows by a rule and the user's limits, one list a row.
func advise(p Purpose, rows []*Row, users [][]limits.Limit) (*Advice, error) {
	a := &Advice{Rule: ruleOf(p)}
	for i, row := range rows {
		l, err := a.Rule.limitsFor(row.Shown().Chain.Chain, users[i])
		if err != nil {
			return nil, err
		}
		a.Judged = append(a.Judged, judge(row, l))
	}
	slices.SortStableFunc(a.Judged, func(x, y Judgement) int { return a.Rule.rank(x.Row) - a.Rule.rank(y.Row) })
	if i := slices.IndexFunc(a.Judged, func(j Judgement) bool { return j.Keeps }); i >= 0 {
		a.Chosen = &a.Judged[i]
	}
	return a, nil
}

// enter puts the verdicts into the results of the rows, where they are the only
// ones.
func (a *Advice) enter() {
	for _, j := range a.Judged {
		for i, r := range j.Row.Shown().Results {
			r.Verdicts = j.Verdicts[i]
		}
	}
}

// rank is the earliest place of a row's names in the order.
func (r Rule) rank(row *Row) int {
	first := len(r.Order)
	for _, name := range row.Names() {
		if i := slices.Index(r.Order, name); i >= 0 {
			first = min(first, i)
		}
	}
	return first
}

func judge(row *Row, l []limits.Limit) Judgement {
	j := Judgement{Row: row, Keeps: true}
	for _, r := range row.Shown().Results {
		held := *r
		held.Judge(l)
		j.Verdicts = append(j.Verdicts, held.Verdicts)
		j.Keeps = j.Keeps && !slices.ContainsFunc(held.Verdicts, misses)
	}
	return j
}

// misses tells whether a verdict rules a row out: anything but a pass does,
// unless it is a set that only gives advice.
func misses(v limits.Verdict) bool {
	return v.Outcome != limits.Within && v.Status != limits.FromMemory
}

// Missed are the verdicts that rule the row out, of each limit the worst over all
// paths.
func (j Judgement) Missed() []limits.Verdict {
	var out []limits.Verdict
	for _, path := range j.Verdicts {
		for _, v := range path {
			if !misses(v) {
				continue
			}
			i := slices.IndexFunc(out, func(o limits.Verdict) bool { return o.Name == v.Name })
			switch {
			case i < 0:
				out = append(out, v)
			case v.Used() > out[i].Used():
				out[i] = v
			}
		}
	}
	return out
}

// Nearest is the judgement that comes nearest to keeping all limits: whose worst
// verdict takes up the least of its limit.
func (a *Advice) Nearest() *Judgement {
	var nearest *Judgement
	least := math.Inf(1)
	for i := range a.Judged {
		worst := 0.0
		for _, v := range a.Judged[i].Missed() {
			used := v.Used()
			if math.IsNaN(used) {
				used = math.Inf(1)
			}
			worst = max(worst, used)
		}
		if nearest == nil || worst < least {
			nearest, least = &a.Judged[i], worst
		}
	}
	return nearest
}
