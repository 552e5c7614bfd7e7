package report

import (
	"fmt"
	"strings"

	"fettle/audit/limits"
)

// limitsTable sets out verdicts, with their notes below.
func limitsTable(b *strings.Builder, verdicts []limits.Verdict) {
	if len(verdicts) == 0 {
		return
	}
	fmt.Fprintf(b, "\n  %-22s %-18s %-30s %-11s %s\n", "limit", "verdict", "worst", "allowed", "margin")
	for _, row := range limits.Rows(verdicts) {
		name := row.Limit
		if len(name) > 22 { // a line of its own, for what is cut off tells limits apart
			fmt.Fprintf(b, "  %s\n", clip(name, Width-2))
			name = ""
		}
		fmt.Fprintf(b, "  %-22s %-18s %-30s %-11s %s\n", name, row.Verdict, clip(row.Worst, 30), clip(row.Allowed, 11), row.Margin)
		for _, note := range row.Notes {
			for _, line := range wrapped(note, Width-6) {
				fmt.Fprintf(b, "      %s\n", line)
			}
		}
	}
}

// limitsCell is the outcome of all limits in one cell.
func limitsCell(verdicts []limits.Verdict) string {
	if len(verdicts) == 0 {
		return "none asked"
	}
	if failed := limits.Failed(verdicts); len(failed) > 0 {
		return fmt.Sprintf("%d exceeded", len(failed))
	}
	for _, v := range verdicts {
		if v.Outcome != limits.Within {
			return string(v.Outcome)
		}
	}
	return string(limits.Within)
}

type verdict struct {
	Name        string   `json:"name"`
	Source      string   `json:"source"`
	Status      string   `json:"status"`
	Measure     string   `json:"measure"`
	Pass        *bool    `json:"pass"` // null: neither within nor exceeded
	Outcome     string   `json:"outcome"`
	Reason      string   `json:"reason"`
	Worst       worst    `json:"worst"`
	Margin      number   `json:"margin"`
	UncoveredHz []number `json:"uncovered_hz"`
	UnstatedHz  []number `json:"unstated_hz"`
	EarlyHz     []number `json:"early_hz"`
}

type worst struct {
	Hz      number `json:"hz"`
	Value   number `json:"value"`
	Limit   number `json:"limit"`
	Unit    string `json:"unit"`
	Weights string `json:"weights"`
}

func verdictsOf(verdicts []limits.Verdict) []verdict {
	out := []verdict{}
	for _, v := range verdicts {
		j := verdict{
			Name: v.Name, Source: v.Source, Status: string(v.Status), Measure: v.Measure, Outcome: string(v.Outcome), Reason: v.Reason,
			Worst:  worst{number(v.Worst.Hz), number(v.Worst.Value), number(v.Worst.Limit), v.Unit, v.Worst.Weights},
			Margin: number(v.Margin), UncoveredHz: scaled(v.Uncovered, 1), UnstatedHz: scaled(v.Unstated, 1), EarlyHz: scaled(v.Early, 1),
		}
		if v.Outcome == limits.Within || v.Outcome == limits.Exceeded {
			pass := v.Outcome == limits.Within
			j.Pass = &pass
		}
		out = append(out, j)
	}
	return out
}
