package page

import (
	"bytes"
	"encoding/xml"
	"errors"
	"fmt"
	"image/png"
	"io"
	"math"
	"strings"
	"testing"

	"fettle/audit/figures"
	"fettle/filter"

	"gonum.org/v1/plot"
)

func written(t *testing.T, p Page) string {
	t.Helper()
	var b strings.Builder
	if err := Write(&b, p); err != nil {
		t.Fatal(err)
	}
	return b.String()
}

func chartOf(t *testing.T, subjects []Subject, name string) *chart {
	t.Helper()
	for _, c := range charts(subjects) {
		if c.name == name {
			return c
		}
	}
	t.Fatalf("there is no plot %s", name)
	return nil
}

// Words first, then tables, then plots; the same page every time.
func TestOrder(t *testing.T) {
	_, p := rumblePage(t)
	text := written(t, p)
	if !strings.HasPrefix(text, Start) {
		t.Errorf("the page begins with %q", text[:40])
	}
	last := -1
	for _, part := range []string{"Two realisations of one chain", "transients are smeared by", "<caption>Realisations</caption>", "<caption>Limits: linear</caption>", `id="magnitude"`, `id="notes"`} {
		at := strings.Index(text, part)
		if at <= last {
			t.Errorf("%q stands at %d, what should be ahead of it at %d", part, at, last)
		}
		last = at
	}
	if again := written(t, p); again != text {
		t.Error("a second page of the same figures differs")
	}
}

// Eight subjects under three limits fit in a message.
func TestSize(t *testing.T) {
	_, p := rumblePage(t)
	one := len(written(t, Page{Subjects: p.Subjects[:1]}))
	for len(p.Subjects) < 8 {
		p.Subjects = append(p.Subjects, p.Subjects[:2]...)
	}
	eight := len(written(t, p))
	t.Logf("one subject %d kB, eight %d kB", one/1000, eight/1000)
	if eight > 4<<20 || one > 1<<20 {
		t.Errorf("a page of one subject takes %d bytes, of eight %d, allowed %d and %d", one, eight, 1<<20, 4<<20)
	}
}

func TestNamesAreEscaped(t *testing.T) {
	_, p := rumblePage(t)
	p.Title = `<script>alert(1)</script>`
	p.Subjects[0].Label = `a "b" & $1 </svg><b>`
	text := written(t, p)
	for _, bad := range []string{"<script>alert", "</svg><b>", `a "b"`} {
		if strings.Contains(text, bad) {
			t.Errorf("the page holds %s", bad)
		}
	}
	if !strings.Contains(text, "a &#34;b&#34; &amp; $1 &lt;/svg&gt;&lt;b&gt;") {
		t.Error("the name is lost")
	}
}

// What cannot be stated leaves a page without plots, or with a gap.
func TestNothingStated(t *testing.T) {
	silent := Subject{Label: "silence", Rate: 48000, Figures: figures.Measure(figures.Response{Rate: 48000})}
	if text := written(t, Page{Title: "none", Subjects: []Subject{silent}}); strings.Contains(text, "<figure") {
		t.Error("silence is plotted")
	}
	one := figures.Response{H: []float64{1}, Rate: 48000}
	identity := Subject{Label: "identity", Rate: 48000, Figures: figures.Measure(one), Response: one.H}
	if text := written(t, Page{Title: "identity", Subjects: []Subject{identity}}); strings.Count(text, "<figure") != 7 {
		t.Errorf("%d plots of an identity", strings.Count(text, "<figure"))
	}
	identity.Response = nil
	text := written(t, Page{Subjects: []Subject{identity}})
	if strings.Contains(text, `id="impulse"`) || !strings.Contains(text, `id="timeline"`) {
		t.Error("plots over time without a response, or none of the bands")
	}
}

// The analytic signal of a unit impulse is 2/(pi n) at odd n (Oppenheim and Schafer,
// discrete Hilbert transformer): 59.8 dB down 13 ms away at 48 kHz.
func TestSkirtIsTheHilbertTransformers(t *testing.T) {
	e := envelope([]float64{1}, 0, 2000)
	for _, n := range []int{0, 1, 3, 101, 625, -625} {
		want := 0.0
		if n != 0 {
			want = 20 * math.Log10(2/(math.Pi*math.Abs(float64(n))))
		}
		// What wraps adds 1/3 (pi n/size)^2, under 0.01 here.
		if got := e.at[e.origin+n]; !(math.Abs(got-want) <= 0.2) {
			t.Errorf("%d samples away: %.2f dB, want %.2f", n, got, want)
		}
	}
}

// The skirt is drawn, and a filter that is an identity draws nothing else.
func TestEnergyOfIdentityIsItsSkirt(t *testing.T) {
	one := figures.Response{H: []float64{1}, Rate: 48000}
	c := chartOf(t, []Subject{{Label: "identity", Rate: 48000, Figures: figures.Measure(one), Response: one.H}}, "energy")
	for _, r := range c.rows {
		if d := r.cells[1].value - r.cells[2].value; !(math.Abs(d) <= 0.1) {
			t.Errorf("%g ms: %g dB over the skirt", r.at, d)
		}
	}
}

// What lies beside the axis is left out of the transform, and is not missed: a tone that
// decays by 60 dB in a tenth of its length looks as the whole of it does.
func TestEnergyOfLongResponse(t *testing.T) {
	const rate, length = 48000, 200_000
	s := Subject{Rate: rate, Response: make([]float64, length)}
	for n := range s.Response {
		s.Response[n] = math.Pow(10, -30*float64(n)/length) * math.Cos(2*math.Pi*300*float64(n)/rate)
	}
	a := timeAxis([]Subject{s}, shownEnergy)
	cut, whole := s.envelope(a), envelope(s.Response, 0, length)
	if len(cut.at) > len(whole.at)/2 {
		t.Errorf("%d points instead of %d: nothing is left out", len(cut.at), len(whole.at))
	}
	for n := int(a.min / toMS * rate); n <= int(a.max/toMS*rate); n++ {
		got, want := cut.at[cut.origin+n], whole.at[whole.origin+n]
		if want > floorDB && !(math.Abs(got-want) <= 0.5) { // what wraps differs by so much at -80 dB
			t.Fatalf("%d samples from the start: %.3f dB, of the whole %.3f", n, got, want)
		}
	}
}

// A decay that falls by 60 dB in a given time is shown whole, and not lost in a
// picture of something far longer.
func TestTimeAxisFits(t *testing.T) {
	for _, ms := range []float64{2, 20, 200} {
		const rate = 48000
		h := make([]float64, int(3*ms*rate/1000))
		for n := range h {
			h[n] = math.Exp(-math.Ln10 * 3 * float64(n) / (ms / 1000 * rate))
		}
		s := Subject{Label: "decay", Rate: rate, Response: h, Figures: figures.Measure(figures.Response{H: h, Rate: rate})}
		a := chartOf(t, []Subject{s}, "energy").x
		if !(a.max >= ms && a.max <= 2*ms+leastMS && a.min >= -0.5*a.max) {
			t.Errorf("a decay of %g ms is shown from %g to %g ms", ms, a.min, a.max)
		}
		if n := len(evenTicks{}.Ticks(a.min, a.max)); n < 4 || n > 10 {
			t.Errorf("%g..%g ms has %d labels", a.min, a.max, n)
		}
	}
}

// The limit stands where the published table puts it: a linear chain's bands
// arrive at 0, and 2 kHz may be 1 ms late (Blauert and Laws 1978).
func TestLimitStandsWherePublished(t *testing.T) {
	_, subjects := audited(t, rumble, 48000, filter.Linear)
	c := chartOf(t, subjects, "limit-audibility")
	for _, r := range c.rows {
		if r.cells[0].value == 2000 {
			if got := r.cells[4].value; !(math.Abs(got-1) <= 0.01) {
				t.Errorf("2 kHz may arrive at %g ms, want 1", got)
			}
			return
		}
	}
	t.Error("2 kHz is not in the table")
}

// The bound on delay spread lies so much above the earliest band.
func TestDelaySpreadIsDrawn(t *testing.T) {
	_, p := rumblePage(t)
	c := chartOf(t, p.Subjects[1:], "limit-delay-spread-2-ms")
	earliest := math.Inf(1)
	for _, r := range c.rows {
		earliest = min(earliest, r.cells[1].value)
	}
	for _, r := range c.rows {
		if got := r.cells[4].value; !(math.Abs(got-earliest-2) <= 1e-9) {
			t.Errorf("%g Hz may arrive at %g ms, want %g", r.cells[0].value, got, earliest+2)
		}
	}
}

// A kernel lies within its tolerance of the closed form, where it is audible.
func TestOffTarget(t *testing.T) {
	_, p := rumblePage(t)
	c := chartOf(t, p.Subjects, "off-target")
	judged := 0
	for _, r := range c.rows {
		for _, x := range r.cells[1:] {
			if r.at > 30 && !math.IsNaN(x.value) {
				judged++
				if !(math.Abs(x.value) <= 0.1) {
					t.Errorf("%g Hz: %g dB off", r.at, x.value)
				}
			}
		}
	}
	if judged < 380 { // two curves of 24 points an octave from 30 Hz to 8 kHz
		t.Errorf("only %d points judged", judged)
	}
}

// Samples in the tables are those of the response, and 0 ms is among them.
func TestResponseTable(t *testing.T) {
	_, p := rumblePage(t)
	s := p.Subjects[0]
	c := chartOf(t, p.Subjects[:1], "impulse")
	zero := false
	for _, r := range c.rows {
		n := int(math.Round(r.at/1000*s.Rate)) + s.Origin
		want := 0.0
		if n >= 0 && n < len(s.Response) {
			want = s.Response[n]
		}
		if r.cells[1].value != want {
			t.Errorf("%g ms: %g, the response has %g", r.at, r.cells[1].value, want)
		}
		zero = zero || n == s.Origin
	}
	if !zero || len(c.rows) > readings+1 {
		t.Errorf("zero is there: %v, among %d rows", zero, len(c.rows))
	}
	// A step ends at the gain for a constant: a high-pass has none, down to the
	// 80 dB that a kernel's error is forgiven under.
	if end := sums(s.Response)[len(s.Response)-1]; !(math.Abs(end) <= 1e-4) {
		t.Errorf("the step ends at %g", end)
	}
	var sum float64
	for _, v := range s.Response[:s.Origin+1] {
		sum += v
	}
	for _, r := range chartOf(t, p.Subjects[:1], "step").rows {
		if r.at == 0 && !(math.Abs(r.cells[1].value-sum) <= 1e-12) {
			t.Errorf("the step is at %g at 0 ms, want %g", r.cells[1].value, sum)
		}
	}
}

// Intervals are in the tables, and drawn as bands.
func TestIntervals(t *testing.T) {
	_, p := rumblePage(t)
	s := p.Subjects[0]
	errs := *s.Figures
	errs.Bands = append([]figures.BandFigures(nil), s.Figures.Bands...)
	for i := range errs.Bands {
		b := &errs.Bands[i]
		b.Arrival, b.Spread, b.PreRing, b.PostRing, b.PhaseDeviation = 0.0003, 0.0001, 0.0001, 0.0001, 2.5
	}
	flat := func(x float64) []float64 {
		out := make([]float64, len(s.Figures.Curve.Hz))
		for i := range out {
			out[i] = x
		}
		return out
	}
	errs.Curve.Magnitude, errs.Curve.GroupDelay = flat(0.25), flat(0.0004)
	exactly := written(t, Page{Subjects: []Subject{s}})
	s.Errors = &errs
	text := written(t, Page{Subjects: []Subject{s}})
	for _, half := range []string{"± 0.25<", "± 0.4000<", "± 0.3000<", "± 2.50<"} {
		if !strings.Contains(text, half) || strings.Contains(exactly, half) {
			t.Errorf("intervals %q: %v with them, %v without", half, strings.Contains(text, half), strings.Contains(exactly, half))
		}
	}
	const band = "fill-opacity:"
	if with, without := strings.Count(text, band), strings.Count(exactly, band); with < without+10 {
		t.Errorf("%d bands are drawn, %d without intervals", with, without)
	}
}

func TestPlotFiles(t *testing.T) {
	p := heardRumble(t)
	files, err := PlotFiles(p.Subjects)
	if err != nil {
		t.Fatal(err)
	}
	more, err := OnsetPlotFiles(p.Hearing)
	if err != nil {
		t.Fatal(err)
	}
	files = append(files, more...)
	names := map[string]bool{}
	for _, f := range files {
		if names[f.Name] || strings.ContainsAny(f.Name, " /\\") {
			t.Errorf("the name %q stands twice or is none", f.Name)
		}
		names[f.Name] = true
		if !IsPlot(f.Data[:64]) {
			t.Errorf("%s is not known again", f.Name)
		}
		if strings.HasSuffix(f.Name, ".png") {
			drawn(t, f)
		} else {
			wellFormed(t, f)
		}
	}
	if want := 2 * (len(charts(p.Subjects)) + 1 + len(threeWays)); len(files) != want {
		t.Errorf("%d files, want %d", len(files), want)
	}
}

func wellFormed(t *testing.T, f PlotFile) {
	t.Helper()
	if bytes.Contains(f.Data, []byte("var(")) {
		t.Errorf("%s needs a style sheet", f.Name)
	}
	paths := 0
	for d := xml.NewDecoder(bytes.NewReader(f.Data)); ; {
		token, err := d.Token()
		if errors.Is(err, io.EOF) {
			break
		}
		if err != nil {
			t.Fatalf("%s: %v", f.Name, err)
		}
		if e, ok := token.(xml.StartElement); ok && e.Name.Local == "path" {
			paths++
		}
	}
	if paths < 10 {
		t.Errorf("%s holds %d lines", f.Name, paths)
	}
}

// drawn looks for ink: less than a tenth of a plot, and more than a hundredth.
func drawn(t *testing.T, f PlotFile) {
	t.Helper()
	img, err := png.Decode(bytes.NewReader(f.Data))
	if err != nil {
		t.Fatalf("%s: %v", f.Name, err)
	}
	b, dark := img.Bounds(), 0
	for y := range b.Dy() {
		for x := range b.Dx() {
			if _, g, _, _ := img.At(x, y).RGBA(); g < 0xb000 {
				dark++
			}
		}
	}
	if share := float64(dark) / float64(b.Dx()*b.Dy()); b.Dx() < 1200 || !(share > 0.01 && share < 0.1) {
		t.Errorf("%s is %d wide, %.1f %% of it inked", f.Name, b.Dx(), 100*share)
	}
}

func TestTicks(t *testing.T) {
	labels := func(ticks []plot.Tick) string {
		var out []string
		for _, x := range ticks {
			if x.Label != "" {
				out = append(out, x.Label)
			}
		}
		return strings.Join(out, " ")
	}
	for _, c := range []struct{ got, want string }{
		{labels(hertzTicks{}.Ticks(10, 24000)), "10 20 50 100 200 500 1k 2k 5k 10k 20k"},
		{labels(hertzTicks{}.Ticks(31.5, 8000)), "50 100 200 500 1k 2k 5k"},
		{labels(evenTicks{}.Ticks(-0.2, 0.2)), "−0.2 −0.1 0.0 0.1 0.2"},
		{labels(evenTicks{}.Ticks(-80, 5)), "−80 −60 −40 −20 0"},
		{labels(evenTicks{}.Ticks(-200, 400)), "−200 −100 0 100 200 300 400"},
		{fmt.Sprint(roundedRange(-0.13, 8.7)), "-2 10"},
		{fixed(-0.004, 2), "0.00"}, {fixed(-1.25, 1), "−1.2"}, {fixed(3, 0), "3"},
	} {
		if c.got != c.want {
			t.Errorf("%q, want %q", c.got, c.want)
		}
	}
}

// Thinning keeps every extreme.
func TestThinned(t *testing.T) {
	x, y := make([]float64, 10000), make([]float64, 10000)
	for i := range x {
		x[i] = float64(i)
	}
	y[1234], y[1235], y[9999] = 5, -7, 2
	tx, ty := thinned(x, y)
	if len(tx) != 2*columns {
		t.Fatalf("%d points", len(tx))
	}
	kept := map[float64]float64{}
	for i := range tx {
		kept[tx[i]] = ty[i]
		if i > 0 && tx[i] < tx[i-1] {
			t.Fatalf("time runs back at %g", tx[i])
		}
	}
	if kept[1234] != 5 || kept[1235] != -7 || kept[9999] != 2 {
		t.Error("an extreme is lost")
	}
}

// Every number of every drawing is finite.
func TestDrawingsAreFinite(t *testing.T) {
	_, p := rumblePage(t)
	for _, c := range charts(p.Subjects) {
		svg, _, _, err := c.svg("", false)
		if err != nil || strings.Contains(svg, "NaN") || strings.Contains(svg, "Inf") {
			t.Errorf("%s holds what cannot be drawn (%v)", c.name, err)
		}
	}
}

// TestRibbonsHaveGaps: where one edge is not stated there is nothing to fill; a rasteriser
// that is given a corner nowhere does not come back.
func TestRibbonsHaveGaps(t *testing.T) {
	nan := math.NaN()
	whole := ribbon{x: []float64{1, 2, 3, 4, 5, 6}, low: []float64{0, 0, 0, 0, 0, 0}, high: []float64{1, 1, 1, 1, 1, 1}, ink: shade, share: 255}
	gap := whole
	gap.low, gap.high = []float64{0, 0, nan, 0, 0, math.Inf(-1)}, []float64{1, nan, 1, 1, math.Inf(1), 1}
	var sizes []int
	for _, m := range []ribbon{whole, gap} {
		c := &chart{name: "x", title: "x", x: axis{min: 1, max: 6}, y: axis{min: 0, max: 1}, marks: []plot.Plotter{m}}
		svg, _, _, err := c.svg("x", true)
		if err != nil || strings.Contains(svg, "NaN") || strings.Contains(svg, "Inf") {
			t.Errorf("%v: %s", err, svg)
		}
		png, err := c.png()
		if err != nil {
			t.Error(err)
		}
		sizes = append(sizes, len(png))
	}
	if got := stretches(gap.widths()); len(got) != 2 || got[0] != [2]int{0, 1} || got[1] != [2]int{3, 6} {
		t.Errorf("stretches %v", got)
	}
	if sizes[0] == sizes[1] {
		t.Error("a gap makes no difference to the picture")
	}
}
