package page

import (
	"bytes"
	"embed"
	"fmt"
	"html/template"
	"io"

	"fettle/audit/figures"
	"fettle/audit/hear"
	"fettle/audit/limits"
)

// Page is what a page shows.
type Page struct {
	Title    string
	Version  string // of the program
	Summary  []string
	Tables   []Table // in their order, ahead of the plots
	Subjects []Subject
	Notes    []string // whole sentences, at the end
	// Hearing is what can be listened to; nil: nothing. See Room.
	Hearing *hear.Excerpts

	drawn []view // the subjects' plots, once they are
}

// Table is text in rows and columns. Its first column names the rows.
type Table struct {
	Caption string
	Head    []string
	Rows    [][]string
}

// Subject is one audited realisation, channel or recording.
type Subject struct {
	Label    string   // short, tells it from the others on the page
	Summary  []string // sentences
	Notes    []string
	Rate     float64 // Hz
	Figures  *figures.Figures
	Verdicts []limits.Verdict
	// Errors has at the places of Figures the half widths of their 95 %
	// intervals. Nil: the figures are exact; NaN: not known.
	Errors *figures.Figures
	// Removed is the latency, in samples, that was taken out before Figures
	// were measured.
	Removed float64
	// Response is the impulse response that Figures were taken of, and Origin
	// the index of its aligned instant. Nil: it is not known, and what happens
	// in time is not drawn.
	Response []float64
	Origin   int
	// Target is what the magnitude was to be; nil: nothing.
	Target *Target
}

// Target is a magnitude in dB at each of Figures.Curve.Hz: the value aimed at and
// between what the tolerance lets it lie. Where any of a range of values will
// do, Aim is that of them nearest to the magnitude; Low is -Inf where deeper is
// free.
type Target struct{ Aim, Low, High []float64 }

// Start is how every page begins.
const Start = "<!doctype html>\n<!-- fettle page -->"

//go:embed page.html page.css page.js hearing.js
var files embed.FS

var layout = template.Must(template.New("page.html").Funcs(template.FuncMap{
	"css":   func() template.CSS { return template.CSS(asset("page.css")) },
	"js":    func() template.JS { return template.JS(asset("page.js")) },
	"ear":   func() template.JS { return template.JS(asset("hearing.js")) },
	"start": func() template.HTML { return template.HTML(Start) },
}).ParseFS(files, "page.html"))

func asset(name string) string {
	text, err := files.ReadFile(name)
	if err != nil {
		panic(err) // it is embedded
	}
	return string(text)
}

// Write writes a page. A subject without bands or curve has no plots.
func Write(w io.Writer, p Page) error {
	if err := p.draw(); err != nil {
		return err
	}
	heard, err := hearingOf(p.Hearing)
	if err != nil {
		return err
	}
	var b bytes.Buffer
	err = layout.Execute(&b, struct {
		Page
		Limits []Table
		Plots  []view
		Heard  *hearingView
	}{p, limitTables(p.Subjects), p.drawn, heard})
	if err != nil {
		return err
	}
	_, err = b.WriteTo(w)
	return err
}

// draw draws the subjects' plots unless they are drawn.
func (p *Page) draw() (err error) {
	if p.drawn == nil {
		p.drawn, err = views(charts(p.Subjects))
	}
	return err
}

func views(drawn []*chart) ([]view, error) {
	var all []view
	for _, c := range drawn {
		v, err := c.view()
		if err != nil {
			return nil, fmt.Errorf("the plot %q cannot be drawn: %w", c.title, err)
		}
		all = append(all, v)
	}
	return all, nil
}

// limitTables are the verdicts on each subject that was judged.
func limitTables(subjects []Subject) []Table {
	var out []Table
	for _, s := range subjects {
		if len(s.Verdicts) == 0 {
			continue
		}
		t := Table{Caption: "Limits: " + s.Label, Head: []string{"limit", "verdict", "worst", "allowed", "margin", "remarks"}}
		for i, r := range limits.Rows(s.Verdicts) {
			t.Rows = append(t.Rows, []string{r.Limit, r.Verdict, r.Worst, r.Allowed, r.Margin, sentences(append(r.Notes, s.Verdicts[i].Source))})
		}
		out = append(out, t)
	}
	return out
}

func sentences(parts []string) string {
	var b bytes.Buffer
	for i, p := range parts {
		if i > 0 {
			b.WriteString("; ")
		}
		b.WriteString(p)
	}
	return b.String()
}

// view is a chart as the page has it.
type view struct {
	Name, Title, Note string
	SVG               template.HTML
	Description       string // for those who cannot see it
	Down              bool   // reading runs up and down, not left to right
	// Edges of the frame that the data stand in, in percent of the picture.
	Left, Right, Top, Bottom float64
	Head                     []string
	Rows                     []viewRow
}

type viewRow struct {
	At    float64 // along the picture, in percent
	Label viewCell
	Cells []viewCell
}

type viewCell struct {
	Value string // in full; "" is not stated
	Text  string
}
