package page

import (
	"bytes"
	"context"
	"encoding/json"
	"iter"
	"math"
	"os"
	"os/exec"
	"path/filepath"
	"strconv"
	"strings"
	"sync"
	"testing"
	"time"

	"fettle/audio/needs"
	"fettle/audit"
	"fettle/audit/report"

	"github.com/chromedp/cdproto/emulation"
	"github.com/chromedp/cdproto/input"
	"github.com/chromedp/chromedp"
	"github.com/chromedp/chromedp/kb"
)

// tab is a page opened from disk in a browser.
type tab struct {
	*testing.T
	ctx     context.Context
	results []*audit.Result
	page    Page
}

// opened opens the page of the rumble chain.
func opened(t *testing.T) *tab {
	t.Helper()
	results, p := rumblePage(t)
	x := openedPage(t, p)
	x.results = results
	return x
}

// The tests share one browser.
var browser struct {
	sync.Once
	ctx  context.Context
	stop context.CancelFunc
	err  error
}

func TestMain(m *testing.M) {
	code := m.Run()
	if browser.stop != nil {
		browser.stop()
	}
	os.Exit(code)
}

// startedBrowser gives the context of the browser, for tabs. Without one the test is
// skipped; where continuous integration runs there must be one.
func startedBrowser(t *testing.T) context.Context {
	t.Helper()
	program, err := exec.LookPath("chromium")
	if err != nil {
		needs.Missing(t, "missing: chromium (Debian: chromium)")
	}
	browser.Do(func() {
		// The page is our own: a browser run by root, as in a container, has no sandbox.
		browser.ctx, browser.stop = chromedp.NewContext(context.Background(), chromedp.WithAllocatorOptions(chromedp.ExecPath(program), chromedp.NoSandbox))
		browser.err = chromedp.Do(browser.ctx)
	})
	if browser.err != nil {
		t.Fatal(browser.err)
	}
	return browser.ctx
}

// openedPage opens a page from disk, and fails if the console has anything to say.
func openedPage(t *testing.T, p Page) *tab {
	t.Helper()
	started := startedBrowser(t)
	name := filepath.Join(t.TempDir(), "page.html")
	var b bytes.Buffer
	if err := Write(&b, p); err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(name, b.Bytes(), 0o666); err != nil {
		t.Fatal(err)
	}
	ctx, stop := chromedp.NewContext(started)
	t.Cleanup(stop)
	x := &tab{T: t, ctx: ctx, page: p}
	x.do(chromedp.EmulateViewport(1280, 900))
	messages := chromedp.Console(ctx)
	x.do(chromedp.Navigate("file://" + name))
	x.nothingSaid(messages)
	return x
}

// nothingSaid fails if there are errors or other words in the console.
func (x *tab) nothingSaid(messages iter.Seq2[chromedp.ConsoleMessage, error]) {
	x.Helper()
	x.do(chromedp.Evaluate[chromedp.Void](`console.error("the last word")`))
	for m, err := range messages {
		if err != nil {
			x.Fatal(err)
		}
		if m.Text == "the last word" {
			return // errors are heard
		}
		x.Errorf("the console says: %s", m)
	}
}

func (x *tab) do(steps ...chromedp.Action[chromedp.Void]) {
	x.Helper()
	ctx, stop := context.WithTimeout(x.ctx, time.Minute)
	if chromedp.FromContext(x.ctx).Target == nil {
		ctx = x.ctx // a deadline on the first step would be the browser's
	}
	defer stop()
	if err := chromedp.Do(ctx, steps...); err != nil {
		x.Fatal(err)
	}
}

func read[T any](x *tab, script string) T {
	x.Helper()
	v, err := chromedp.Run(x.ctx, chromedp.Evaluate[T](script))
	if err != nil {
		x.Fatalf("%s: %v", script, err)
	}
	return v
}

// media sets what the page is shown on: "" or "print", "light" or "dark".
func (x *tab) media(kind, scheme string) {
	x.Helper()
	_, err := chromedp.Call(x.ctx, emulation.SetEmulatedMedia, emulation.SetEmulatedMediaParams{
		Media: kind, Features: []*emulation.MediaFeature{{Name: "prefers-color-scheme", Value: scheme}},
	})
	if err != nil {
		x.Fatal(err)
	}
}

// table reads the full values of the table behind a plot: rows of columns.
func (x *tab) table(plot string) [][]string {
	return read[[][]string](x, `[...document.querySelectorAll("#`+plot+` tbody tr")].map(r => [...r.cells].map(c => c.dataset.v))`)
}

func (x *tab) readout(plot string) string {
	return read[string](x, `document.querySelector("#`+plot+` .readout").textContent`)
}

// document is what of the JSON report the page is held against.
type document struct {
	Results []struct {
		Phase          string
		LatencySamples float64 `json:"latency_samples"`
		ToleranceDB    float64 `json:"tolerance_db"`
		Bands          []map[string]any
		Curve          struct {
			Hz           []float64
			MagnitudeDB  []float64  `json:"magnitude_db"`
			GroupDelayMS []*float64 `json:"group_delay_ms"`
		}
	}
}

func documentOf(t *testing.T, results []*audit.Result) document {
	t.Helper()
	var b bytes.Buffer
	if err := report.JSON(&b, results, "1.2.3"); err != nil {
		t.Fatal(err)
	}
	var d document
	if err := json.Unmarshal(b.Bytes(), &d); err != nil {
		t.Fatal(err)
	}
	return d
}

// number reads a table's value; NaN is not stated.
func number(t *testing.T, text string) float64 {
	t.Helper()
	if text == "" {
		return math.NaN()
	}
	v, err := strconv.ParseFloat(text, 64)
	if err != nil {
		t.Fatal(err)
	}
	return v
}

func TestPageInBrowser(t *testing.T) {
	x := opened(t)
	t.Run("needs nothing else", x.needsNothing)
	t.Run("all plots", x.allPlots)
	t.Run("values", x.values)
	t.Run("pointer", x.pointer)
	t.Run("keys", x.keys)
	t.Run("names for readers", x.names)
	t.Run("labels apart", x.labelsApart)
	t.Run("narrow", x.narrow)
	t.Run("colours", x.colours)
}

// on is the tab for a subtest.
func (x tab) on(t *testing.T) *tab {
	x.T = t
	return &x
}

func (x *tab) needsNothing(t *testing.T) {
	x = x.on(t)
	if n := read[int](x, `performance.getEntriesByType("resource").length`); n != 0 {
		t.Errorf("the page asked for %d other files", n)
	}
	if n := read[int](x, `document.querySelectorAll("[src], link, [href], iframe, object").length`); n != 0 {
		t.Errorf("%d elements name something outside the page", n)
	}
}

func (x *tab) allPlots(t *testing.T) {
	x = x.on(t)
	want := "magnitude off-target group-delay limit-audibility-1 limit-delay-spread-2-ms-1 limit-audibility-2 limit-delay-spread-2-ms-2 " +
		"phase-deviation timeline-1 timeline-2 energy impulse-1 step-1 impulse-2 step-2"
	if got := strings.Join(read[[]string](x, `[...document.querySelectorAll("figure.plot")].map(f => f.id)`), " "); got != want {
		t.Errorf("plots are %s, want %s", got, want)
	}
	// Every plot draws lines that have a size, within its frame.
	small := read[[]string](x, `[...document.querySelectorAll("figure.plot")].filter(f => {
		const frame = f.querySelector("svg").getBoundingClientRect();
		const lines = [...f.querySelectorAll("svg path")].map(p => p.getBoundingClientRect());
		return !lines.some(b => b.width > frame.width / 4) || lines.some(b => b.right > frame.right + 3 || b.left < frame.left - 3 || b.top < frame.top - 3 || b.bottom > frame.bottom + 3);
	}).map(f => f.id)`)
	if len(small) > 0 {
		t.Errorf("nothing wide, or something out of the frame, is drawn in %v", small)
	}
}

// What the page holds are the figures of the JSON report, to the last bit where
// both state the same figure.
func (x *tab) values(t *testing.T) {
	x = x.on(t)
	doc := documentOf(t, x.results)
	magnitude, delay, phase := x.table("magnitude"), x.table("group-delay"), x.table("phase-deviation")
	for i, r := range doc.Results {
		if len(magnitude) != len(r.Curve.Hz) || len(phase) != len(r.Bands) {
			t.Fatalf("%d frequencies and %d bands, the report has %d and %d", len(magnitude), len(phase), len(r.Curve.Hz), len(r.Bands))
		}
		bulk := (r.LatencySamples + x.results[i].Figures.Latency) / float64(x.results[i].Rate) * 1e3
		for k, row := range magnitude {
			if number(t, row[0]) != r.Curve.Hz[k] || number(t, row[1+i]) != r.Curve.MagnitudeDB[k] {
				t.Errorf("%s at %g Hz: %s dB at %s Hz, the report has %g", r.Phase, r.Curve.Hz[k], row[1+i], row[0], r.Curve.MagnitudeDB[k])
			}
			got, want := number(t, delay[k][1+i]), r.Curve.GroupDelayMS[k]
			if math.IsNaN(got) != (want == nil) || want != nil && !(math.Abs(got-(*want-bulk)) <= 1e-9) {
				t.Errorf("%s at %g Hz: group delay %g ms after the bulk latency, the report differs", r.Phase, r.Curve.Hz[k], got)
			}
		}
		line := x.table("timeline-" + strconv.Itoa(i+1))
		for k, b := range r.Bands {
			if b["carried"] != true {
				if line[k][1] != "not carried" || phase[k][1+i] != "not carried" {
					t.Errorf("%s: the band at %v Hz is carried on the page only", r.Phase, b["nominal"])
				}
				continue
			}
			for c, key := range []string{"nominal", "arrival_ms", "spread_ms", "pre_ring_ms", "post_ring_ms"} {
				if number(t, line[k][c]) != b[key] {
					t.Errorf("%s, %v Hz: %s is %s, the report has %v", r.Phase, b["nominal"], key, line[k][c], b[key])
				}
			}
			if number(t, phase[k][1+i]) != b["phase_deviation_deg"] {
				t.Errorf("%s, %v Hz: phase deviation %s, the report has %v", r.Phase, b["nominal"], phase[k][1+i], b["phase_deviation_deg"])
			}
		}
	}
}

// A pointer over 1 kHz on the logarithmic axis reads the nearest point, half of
// 1/24 octave away at most.
func (x *tab) pointer(t *testing.T) {
	x = x.on(t)
	box := read[map[string]float64](x, `(() => {
		const r = document.querySelector("#magnitude .reader"); r.scrollIntoView({block: "center"});
		const b = r.getBoundingClientRect(); return {left: b.left, top: b.top, width: b.width, height: b.height}; })()`)
	half := x.page.Subjects[0].Rate / 2
	at := box["left"] + box["width"]*math.Log(1000.0/10)/math.Log(half/10)
	x.do(chromedp.MouseEvent(input.DispatchMouseEventTypeMouseMoved, at, box["top"]+box["height"]/2))
	now := read[int](x, `Number(document.querySelector("#magnitude .reader").getAttribute("aria-valuenow"))`)
	row := x.table("magnitude")[now-1]
	if hz := number(t, row[0]); !(math.Abs(math.Log2(hz/1000)) <= 1.0/48+0.01) {
		t.Errorf("the pointer at 1 kHz reads %g Hz", hz)
	}
	text := x.readout("magnitude")
	for _, want := range []string{"frequency, Hz: " + fixed(number(t, row[0]), 1), "linear, dB: " + fixed(number(t, row[1]), 2), "minimum, dB: "} {
		if !strings.Contains(text, want) {
			t.Errorf("the readout %q lacks %q", text, want)
		}
	}
	cursor := read[float64](x, `document.querySelector("#magnitude .cursor").getBoundingClientRect().left`)
	if !(math.Abs(cursor-at) <= box["width"]/200) {
		t.Errorf("the cursor stands at %g, the pointer at %g", cursor, at)
	}
}

func (x *tab) keys(t *testing.T) {
	x = x.on(t)
	state := func(plot string) (now int, text string) {
		s := read[[]string](x, `(() => { const r = document.querySelector("#`+plot+` .reader"); return [r.getAttribute("aria-valuenow"), r.getAttribute("aria-valuetext")]; })()`)
		now, _ = strconv.Atoi(s[0])
		return now, s[1]
	}
	for _, plot := range []string{"group-delay", "timeline-1", "energy", "step-1"} {
		rows := len(x.table(plot))
		x.do(chromedp.Focus(chromedp.CSS("#" + plot + " .reader")))
		for _, k := range []struct {
			key  string
			want int
		}{{kb.Home, 1}, {kb.ArrowRight, 2}, {kb.ArrowUp, 3}, {kb.ArrowLeft, 2}, {kb.ArrowDown, 1}, {kb.ArrowLeft, 1}, {kb.End, rows}, {kb.ArrowRight, rows}} {
			x.do(chromedp.KeyEvent(k.key))
			now, text := state(plot)
			if now != k.want || text != x.readout(plot) || text == "" {
				t.Errorf("%s: at row %d, want %d; spoken %q, shown %q", plot, now, k.want, text, x.readout(plot))
			}
		}
	}
	// Up is the higher band, as drawn.
	tops := read[[]float64](x, `(() => { const f = document.querySelector("#timeline-1"); return [...f.querySelectorAll("tbody tr")].map(r => Number(r.dataset.at)); })()`)
	for i := 1; i < len(tops); i++ {
		if !(tops[i] < tops[i-1]) {
			t.Errorf("band %d stands at %g %%, the one under it at %g %%", i, tops[i], tops[i-1])
		}
	}
}

// Those who hear the page are told what stands where.
func (x *tab) names(t *testing.T) {
	x = x.on(t)
	for what, script := range map[string]string{
		"pictures without role or name":  `[...document.querySelectorAll("figure.plot svg")].filter(s => s.getAttribute("role") !== "img" || s.getAttribute("aria-label").length < 40)`,
		"figures without caption":        `[...document.querySelectorAll("figure")].filter(f => !f.querySelector("figcaption").textContent.trim())`,
		"readers out of the tab order":   `[...document.querySelectorAll(".reader")].filter(r => r.tabIndex !== 0 || !r.getAttribute("aria-label"))`,
		"header cells without scope":     `[...document.querySelectorAll("th")].filter(h => !h.scope)`,
		"identifiers that stand twice":   `[...document.querySelectorAll("[id]")].filter(e => document.querySelectorAll("#" + CSS.escape(e.id)).length > 1)`,
		"tables with rows of two widths": `[...document.querySelectorAll("table")].filter(t => new Set([...t.rows].map(r => r.cells.length)).size > 1)`,
	} {
		if n := read[int](x, `(`+script+`).length`); n != 0 {
			t.Errorf("%d %s", n, what)
		}
	}
	if lang := read[string](x, `document.documentElement.lang`); lang != "en" {
		t.Errorf("language %q", lang)
	}
}

// No two labels of a plot touch, at any width.
func (x *tab) labelsApart(t *testing.T) {
	x = x.on(t)
	defer x.do(chromedp.EmulateViewport(1280, 900))
	for _, width := range []int64{1280, 640, 360} {
		x.do(chromedp.EmulateViewport(width, 900))
		touching := read[[]string](x, `[...document.querySelectorAll("figure.plot")].flatMap(f => {
			const texts = [...f.querySelectorAll("svg text")].map(e => [e.textContent, e.getBoundingClientRect()]);
			return texts.flatMap(([a, p], i) => texts.slice(i + 1).filter(([b, q]) =>
				p.left < q.right && q.left < p.right && p.top + p.height * .12 < q.bottom - q.height * .12 && q.top + q.height * .12 < p.bottom - p.height * .12
			).map(([b]) => f.id + ": " + a + " / " + b));
		})`)
		if len(touching) > 0 {
			t.Errorf("%d wide: labels overlap: %v", width, touching)
		}
		if n := read[int](x, `document.querySelectorAll("#magnitude svg text").length`); n < 15 {
			t.Errorf("only %d labels", n)
		}
	}
}

// Nothing but tables in their own frames scrolls sideways, down to 320 pixels;
// 640 is what twice the size leaves of 1280.
func (x *tab) narrow(t *testing.T) {
	x = x.on(t)
	defer x.do(chromedp.EmulateViewport(1280, 900))
	for _, width := range []int64{640, 320} {
		x.do(chromedp.EmulateViewport(width, 900))
		if w := read[int64](x, `document.documentElement.scrollWidth`); w > width {
			t.Errorf("%d wide: the page is %d wide", width, w)
		}
	}
}

// Contrast is at least 4.5 for text and 3 for lines (WCAG 2.1, 1.4.3 and 1.4.11),
// light, dark and printed; print is ink on white for dark readers, too.
func (x *tab) colours(t *testing.T) {
	x = x.on(t)
	defer x.media("", "light")
	for _, m := range []struct {
		kind, scheme string
		dark         bool
	}{{"", "light", false}, {"", "dark", true}, {"print", "dark", false}} {
		x.media(m.kind, m.scheme)
		paper := luminance(t, read[string](x, `getComputedStyle(document.querySelector("figure")).backgroundColor`))
		if m.dark != (paper < 0.1) || m.kind == "print" && paper != 1 {
			t.Errorf("%v: the paper's luminance is %g", m, paper)
		}
		seen := read[map[string]string](x, `(() => {
			const out = {text: getComputedStyle(document.querySelector("h3")).color, note: getComputedStyle(document.querySelector(".note")).color};
			for (const e of document.querySelectorAll("#magnitude svg path")) if (e.style.stroke.startsWith("var(--s")) out["line " + e.style.stroke] = getComputedStyle(e).stroke;
			for (const e of document.querySelectorAll("#magnitude svg text")) out["label " + e.style.fill] = getComputedStyle(e).fill;
			return out; })()`)
		if len(seen) < 6 {
			t.Errorf("%v: only %v are coloured", m, seen)
		}
		for what, colour := range seen {
			least := 4.5
			if strings.HasPrefix(what, "line") {
				least = 3
			}
			if c := contrast(luminance(t, colour), paper); !(c >= least) {
				t.Errorf("%v: the contrast of %s is %.2f, wanted %g", m, what, c, least)
			}
		}
		hint := read[string](x, `getComputedStyle(document.querySelector(".readout")).display`)
		if (hint == "none") != (m.kind == "print") {
			t.Errorf("%v: readouts are shown as %q", m, hint)
		}
	}
}

// luminance is the relative luminance of "rgb(r, g, b)" (WCAG 2.1).
func luminance(t *testing.T, colour string) float64 {
	t.Helper()
	parts := strings.Split(strings.TrimSuffix(strings.TrimPrefix(colour, "rgb("), ")"), ",")
	if len(parts) != 3 {
		t.Fatalf("%q is no colour", colour)
	}
	var sum float64
	for i, weight := range []float64{0.2126, 0.7152, 0.0722} {
		v := number(t, strings.TrimSpace(parts[i])) / 255
		if v <= 0.04045 {
			v /= 12.92
		} else {
			v = math.Pow((v+0.055)/1.055, 2.4)
		}
		sum += weight * v
	}
	return sum
}

func contrast(a, b float64) float64 { return (max(a, b) + 0.05) / (min(a, b) + 0.05) }
