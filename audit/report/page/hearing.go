package page

import (
	"encoding/base64"
	"fmt"
	"html/template"
	"math"

	"fettle/audit/hear"
)

const (
	// MostBytes is how long a page with players may be, and a little is kept back.
	MostBytes = 4_000_000
	keptBack  = 30_000
	// onsetBytes is at least what the plots about the onset take for a realisation.
	onsetBytes = 55_000
)

// Room is how long players of so many realisations may be, in bytes, so that the page
// with them keeps to MostBytes: it is for hear.Options. It draws the subjects' plots for
// good, so they must be complete.
func (p *Page) Room(ways int) (int, error) {
	if err := p.draw(); err != nil {
		return 0, err
	}
	var size counter
	if err := Write(&size, *p); err != nil {
		return 0, err
	}
	return max(0, MostBytes-keptBack-int(size)-(1+ways)*onsetBytes), nil
}

// counter counts what is written.
type counter int

func (c *counter) Write(b []byte) (int, error) {
	*c += counter(len(b))
	return len(b), nil
}

// hearingView is hear.Excerpts as the page has them.
type hearingView struct {
	Said     []string // sentences
	Original template.HTMLAttr
	Rows     []playerView
	Plots    []view
}

type playerView struct {
	Label, Gain, Removed string
	Output               template.HTMLAttr
	Ratio                float64
}

// hearingOf is nil where nothing is to be heard.
func hearingOf(e *hear.Excerpts) (*hearingView, error) {
	if e == nil {
		return nil, nil
	}
	plots, err := views(aboutOnset(e))
	if err != nil {
		return nil, err
	}
	v := &hearingView{Said: said(e), Original: playable(e.Original), Plots: plots}
	for _, o := range e.Outputs {
		v.Rows = append(v.Rows, playerView{Label: o.Label, Gain: gain(o), Removed: removed(o), Output: playable(o.WAV), Ratio: o.Ratio})
	}
	return v, nil
}

// playable is a whole attribute: within one the template would write each + as five
// letters.
func playable(file []byte) template.HTMLAttr {
	return template.HTMLAttr(`src="data:audio/wav;base64,` + base64.StdEncoding.EncodeToString(file) + `"`)
}

func gain(o hear.Output) string {
	switch text := signedDB(o.Gain); o.Match {
	case hear.ByLoudness:
		return text
	case hear.ByEnergy:
		return text + ", by energy"
	}
	return "none: silent"
}

func removed(o hear.Output) string {
	if math.IsInf(o.Removed, -1) {
		return "nothing"
	}
	return signedDB(o.Removed)
}

func signedDB(db float64) string {
	text := fixed(db, 1) + " dB"
	if db > 0 && text != "0.0 dB" {
		return "+" + text
	}
	return text
}

// said is what a listener has to know.
func said(e *hear.Excerpts) []string {
	out := []string{
		e.Where(),
		"Outputs are brought to the loudness of the original (ITU-R BS.1770, over blocks that its gates pass in both) by the gain in the table, so that none is preferred for being louder. " +
			"What was removed is the original less the output before that gain. It plays at its true level beside the original: where you hear nothing, that little was removed. Where phase was changed, what that changed is in it too.",
	}
	for _, o := range e.Outputs {
		if o.Match == hear.ByEnergy {
			out = append(out, "The excerpt is too short or too faint to state a loudness; where the table says “by energy”, levels were matched by K-weighted energy without gates.")
			break
		}
	}
	if e.Attenuation > 0 {
		out = append(out, fmt.Sprintf("All players are lowered by a further %s dB, so that none is clipped.", fixed(e.Attenuation, 1)))
	}
	return out
}
