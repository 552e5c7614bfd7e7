package page

import (
	"encoding/base64"
	"encoding/binary"
	"fmt"
	"math"
	"regexp"
	"slices"
	"strings"
	"testing"
	"time"

	"fettle/audit/hear"
	"fettle/filter"

	"github.com/chromedp/chromedp"
	"github.com/chromedp/chromedp/kb"
)

func TestHearingInBrowser(t *testing.T) {
	x := openedPage(t, heardRumble(t))
	messages := chromedp.Console(x.ctx)
	t.Run("quiet", x.quiet)
	t.Run("play", x.play)
	t.Run("one volume", x.oneVolume)
	t.Run("repeat", x.repeats)
	t.Run("removed", x.removedPart)
	t.Run("printed", x.printed)
	t.Run("names for readers", x.names)
	t.Run("labels apart", x.labelsApart)
	t.Run("narrow", x.narrow)
	t.Run("blind", x.blind)
	t.Run("blind again", x.blindAgain)
	t.Run("onset plots", x.onsetPlots)
	x.nothingSaid(messages)
}

// sources are what the players of a selection play.
func (x *tab) sources(selection string) []string {
	x.Helper()
	return read[[]string](x, `[...document.querySelectorAll("#hearing `+selection+`")].map(p => p.src)`)
}

// quiet: all players have their data, start low, and name themselves.
func (x *tab) quiet(t *testing.T) {
	x = x.on(t)
	all := x.sources("audio")
	if want := 1 + 2*len(x.page.Hearing.Outputs); len(all) != want {
		t.Fatalf("%d players, want %d", len(all), want)
	}
	for what, script := range map[string]string{
		"are not low":             `p.volume !== 0.2`,
		"play something else":     `!p.src.startsWith("data:audio/wav;base64,")`,
		"have no controls":        `!p.controls`,
		"have no name":            `!p.getAttribute("aria-label")`,
		"are out of the document": `!p.isConnected`,
	} {
		if n := read[int](x, `[...document.querySelectorAll("#hearing audio")].filter(p => `+script+`).length`); n != 0 {
			t.Errorf("%d players %s", n, what)
		}
	}
	if n := read[int](x, `performance.getEntriesByType("resource").filter(e => !e.name.startsWith("data:")).length`); n != 0 {
		t.Errorf("the page asked for %d other files", n)
	}
}

// until waits for a script to be true.
func (x *tab) until(what, script string) {
	x.Helper()
	for range 200 {
		if read[bool](x, script) {
			return
		}
		time.Sleep(20 * time.Millisecond)
	}
	x.Fatalf("%s: it never happens", what)
}

// press focuses what a selector finds and presses a key.
func (x *tab) press(selector, key string) {
	x.Helper()
	x.do(chromedp.Focus(chromedp.CSS(selector)), chromedp.KeyEvent(key))
}

// play: all players last as long as is said, and the keyboard plays them; what is begun
// while another plays goes on where that was.
func (x *tab) play(t *testing.T) {
	x = x.on(t)
	x.until("players load", `[...document.querySelectorAll("#hearing audio")].every(p => p.duration > 0)`)
	for _, d := range read[[]float64](x, `[...document.querySelectorAll("#hearing audio")].map(p => p.duration)`) {
		if !(math.Abs(d-x.page.Hearing.Length) <= 0.02) {
			t.Errorf("a player lasts %g s, want %g", d, x.page.Hearing.Length)
		}
	}
	const first, second = "#untreated audio", "tr.treated audio"
	x.press(first, " ")
	x.until("the original plays", `document.querySelector("`+first+`").currentTime > 0.1`)
	x.press(second, " ")
	x.until("the output plays", `!document.querySelector("`+second+`").paused && document.querySelector("`+second+`").currentTime > 0`)
	if read[bool](x, `!document.querySelector("`+first+`").paused`) {
		t.Error("two players play at once")
	}
	if !read[bool](x, `document.querySelector("`+second+`").currentTime >= document.querySelector("`+first+`").currentTime - 0.02`) {
		t.Error("the second player does not go on where the first was")
	}
	x.press(second, " ")
	x.until("the output stops", `document.querySelector("`+second+`").paused`)
}

// oneVolume: levels stay matched.
func (x *tab) oneVolume(t *testing.T) {
	x = x.on(t)
	read[float64](x, `document.querySelector("tr.treated audio").volume = 0.1`)
	x.until("all players follow", `[...document.querySelectorAll("#hearing audio")].every(p => p.volume === 0.1)`)
}

func (x *tab) repeats(t *testing.T) {
	x = x.on(t)
	for _, on := range []bool{true, false} {
		x.press("#repeat", " ")
		if read[bool](x, `[...document.querySelectorAll("#hearing audio")].some(p => p.loop !== `+fmt.Sprint(on)+`)`) {
			t.Errorf("repeat %t: some players differ", on)
		}
	}
}

// codes are the samples of a player with so many frames' worth of bytes at its end.
func codes(t *testing.T, url string, bytes int) (head []byte, out []float64) {
	t.Helper()
	file, err := base64.StdEncoding.DecodeString(strings.TrimPrefix(url, "data:audio/wav;base64,"))
	if err != nil {
		t.Fatal(err)
	}
	head = file[:len(file)-bytes]
	for b := file[len(head):]; len(b) > 0; b = b[2:] {
		out = append(out, float64(int16(binary.LittleEndian.Uint16(b))))
	}
	return head, out
}

// removedPart is what the page makes: the original less the output, where that has
// its own gain taken off, to half a step.
func (x *tab) removedPart(t *testing.T) {
	x = x.on(t)
	e := x.page.Hearing
	made := x.sources("td.removed audio")
	if len(made) != len(e.Outputs) {
		t.Fatalf("%d players of what was removed", len(made))
	}
	bytes := int(math.Round(e.Length*float64(e.Rate))) * len(e.Channels) * 2
	encoded := func(file []byte) string { return base64.StdEncoding.EncodeToString(file) }
	head, original := codes(t, encoded(e.Original), bytes)
	for i, o := range e.Outputs {
		_, output := codes(t, encoded(o.WAV), bytes)
		gotHead, got := codes(t, made[i], bytes)
		if !slices.Equal(gotHead, head) || len(got) != len(original) {
			t.Fatalf("%s: %d samples, or another header", o.Label, len(got))
		}
		loud := 0.0
		for n := range got {
			loud = max(loud, math.Abs(got[n]))
			if want := original[n] - o.Ratio*output[n]; !(math.Abs(got[n]-want) <= 0.5+1e-9) {
				t.Fatalf("%s: sample %d is %g, want %g", o.Label, n, got[n], want)
			}
		}
		if loud == 0 {
			t.Errorf("%s: nothing is removed", o.Label)
		}
	}
}

// printed: no players or buttons, but what was found.
func (x *tab) printed(t *testing.T) {
	x = x.on(t)
	x.media("print", "light")
	defer x.media("", "light")
	const shown = `.filter(e => e.getClientRects().length > 0).length`
	if n := read[int](x, `[...document.querySelectorAll("#hearing :is(audio, button, input, .caution, td.removed)")]`+shown); n != 0 {
		t.Errorf("%d players or buttons are printed", n)
	}
	if n := read[int](x, `[...document.querySelectorAll("#hearing tr.treated th")]`+shown); n != len(x.page.Hearing.Outputs) {
		t.Errorf("%d realisations are printed", n)
	}
}

var encodedData = regexp.MustCompile(`base64,[A-Za-z0-9+/=]*`)

// telling are texts that must not stand in the section while it is blind: labels, and
// gains.
func (x *tab) telling() []string {
	var out []string
	for _, r := range threeWays {
		out = append(out, string(r))
	}
	for _, o := range x.page.Hearing.Outputs {
		if text := gain(o); text != "0.0 dB" {
			out = append(out, text)
		}
		out = append(out, o.Label, removed(o))
	}
	return out
}

// leakless fails where something in the section, or about the document, tells
// which player is which.
func (x *tab) leakless() {
	x.Helper()
	text := read[string](x, `document.querySelector("#hearing").outerHTML + document.title + location.href + [...document.querySelectorAll("#hearing *")].map(e => Object.values(e.dataset).join() + (e.title || "") + (e.innerText || "")).join()`)
	text = strings.ToLower(encodedData.ReplaceAllString(text, ""))
	if !strings.Contains(text, "player a") {
		x.Fatal("the section is not blind")
	}
	for _, word := range x.telling() {
		if strings.Contains(text, strings.ToLower(word)) {
			x.Errorf("while blind, the section says %q", word)
		}
	}
}

// playing gives the index of the output that each unnamed player plays.
func (x *tab) playing() []int {
	x.Helper()
	var known []string
	for _, o := range x.page.Hearing.Outputs {
		known = append(known, base64.StdEncoding.EncodeToString(o.WAV))
	}
	var out []int
	for _, src := range x.sources("audio[aria-label^=Player]") {
		out = append(out, slices.Index(known, strings.TrimPrefix(src, "data:audio/wav;base64,")))
	}
	sorted := slices.Clone(out)
	slices.Sort(sorted)
	if !slices.Equal(sorted, []int{0, 1, 2}) {
		x.Fatalf("the players play outputs %v", out)
	}
	return out
}

// votes presses the button of whichever player plays an output; -1: no preference.
func (x *tab) votes(output int) {
	x.Helper()
	text := "I have no preference"
	if output >= 0 {
		text = "I prefer " + string(rune('A'+slices.Index(x.playing(), output)))
	}
	x.pressButton(text)
}

func (x *tab) pressButton(text string) {
	x.Helper()
	if n := read[int](x, `(() => { const b = [...document.querySelectorAll("#hearing button")].filter(b => b.textContent === "`+text+`"); if (b.length) b[0].focus(); return b.length; })()`); n != 1 {
		x.Fatalf("%d buttons say %q", n, text)
	}
	x.do(chromedp.KeyEvent(kb.Enter))
}

func (x *tab) told() string {
	return read[string](x, `document.querySelector("#hearing [role=status][aria-live=polite]").textContent`)
}

// blind: rounds by keyboard alone, and a tally that adds up.
func (x *tab) blind(t *testing.T) {
	x = x.on(t)
	x.pressButton("Listen blind")
	if got := x.told(); !strings.Contains(got, "round 1") {
		t.Errorf("told is %q", got)
	}
	x.leakless()
	orders := map[string]bool{}
	for round, output := range []int{1, 1, 0, 1, -1, 1, 0, 1} {
		orders[fmt.Sprint(x.playing())] = true
		x.votes(output)
		if got, want := x.told(), fmt.Sprintf("Round %d is counted", round+1); !strings.Contains(got, want) {
			t.Errorf("told is %q, want %q", got, want)
		}
		x.leakless()
	}
	if len(orders) < 2 { // eight draws of six orders: 4e-6 by chance
		t.Errorf("the only order is %v", orders)
	}
	if read[bool](x, `[...document.querySelectorAll("#hearing audio")].some(p => p.volume !== 0.1)`) {
		t.Error("the blind players have another volume")
	}
	x.until("blind players load", `[...document.querySelectorAll("#hearing audio")].every(p => Math.abs(p.duration - `+fmt.Sprint(x.page.Hearing.Length)+`) <= 0.02)`)
	last := x.playing()
	x.pressButton("Reveal the tally")
	got := read[[]string](x, `[...document.querySelectorAll("#hearing .tally tr")].map(r => [...r.cells].map(c => c.textContent).join(": "))`)
	want := []string{"linear: preferred 2 times", "minimum: preferred 5 times", "zero: preferred 0 times", "no preference: 1 time"}
	if !slices.Equal(got, want) {
		t.Errorf("the tally is %q, want %q", got, want)
	}
	text := read[string](x, `document.querySelector("#hearing .tally").textContent`)
	// 5 or more of 7 at a third each: (21·4 + 7·2 + 1)/3^7 = 99/2187, of three players.
	for _, want := range []string{"Your tally of 8 rounds", "up to 14 %",
		fmt.Sprintf("Player A was %s, Player B was %s, Player C was %s", threeWays[last[0]], threeWays[last[1]], threeWays[last[2]])} {
		if !strings.Contains(text, want) {
			t.Errorf("the tally says %q, want %q", text, want)
		}
	}
	if got := x.sources("tr.treated td:nth-child(4) audio"); len(got) != 3 {
		t.Errorf("%d named players are back", len(got))
	}
}

// blindAgain begins from nothing.
func (x *tab) blindAgain(t *testing.T) {
	x = x.on(t)
	x.pressButton("Listen blind")
	x.leakless()
	x.votes(2)
	x.pressButton("Reveal the tally")
	got := read[[]string](x, `[...document.querySelectorAll("#hearing .tally tr")].map(r => [...r.cells].map(c => c.textContent).join(": "))`)
	if want := "zero: preferred 1 time"; len(got) != 4 || got[2] != want {
		t.Errorf("the tally is %q, want %q", got, want)
	}
}

// onsetPlots are there, after blind listening too, and are read as all others.
func (x *tab) onsetPlots(t *testing.T) {
	x = x.on(t)
	want := []string{"onset-levels", "onset-1", "onset-2", "onset-3"}
	if got := read[[]string](x, `[...document.querySelectorAll("#hearing figure.plot")].map(f => f.id)`); !slices.Equal(got, want) {
		t.Fatalf("the plots are %v, want %v", got, want)
	}
	for _, plot := range want {
		x.press("#"+plot+" .reader", kb.Home)
		row := x.table(plot)[0]
		if text := x.readout(plot); !strings.Contains(text, "time, ms: "+fixed(number(t, row[0]), 3)) {
			t.Errorf("%s: the readout is %q, the table begins with %v", plot, text, row)
		}
	}
}

// TestOneWayBlind is held against the original.
func TestOneWayBlind(t *testing.T) {
	x := openedPage(t, heardPage(t, knock(16000, 1, 2, 1), waysOf(t, rumble, 16000, filter.Minimum)))
	x.pressButton("Listen blind")
	text := read[string](x, `document.querySelector("#hearing").outerHTML`)
	text = strings.ToLower(encodedData.ReplaceAllString(text, ""))
	for _, word := range []string{"minimum", "original", "untreated"} {
		if strings.Contains(text, word) {
			t.Errorf("while blind, the section says %q", word)
		}
	}
	if n := len(x.sources("audio")); n != 2 {
		t.Errorf("%d players are blind", n)
	}
	x.pressButton("Reveal the tally")
	tally := read[string](x, `document.querySelector("#hearing .tally").textContent`)
	if !strings.Contains(tally, "Your tally of 0 rounds") || !strings.Contains(tally, "original") || strings.Contains(tally, "guessing") {
		t.Errorf("the tally says %q", tally)
	}
}

// TestShortAndLongInBrowser: labels stand apart, and nothing is cut off, for a filter
// that rings for 2 ms and for one that rings for 200 ms.
func TestShortAndLongInBrowser(t *testing.T) {
	for name, c := range map[string]struct {
		text string
		lead [2]float64 // s, between
	}{
		"short": {"stages: [{lowpass: {pass: 5 kHz, stop: 6.2 kHz, ripple: 0.1 dB, reject: 60 dB, family: kaiser}}]", [2]float64{0.5e-3, 2e-3}},
		"long":  {"stages: [{notch: {at: 50 Hz, width: 2.5 Hz}}, {highpass: {at: 70 Hz, order: 4}}]", [2]float64{0.15, 0.25}},
	} {
		results, subjects := audited(t, c.text, 16000, filter.Linear, filter.IIR)
		lead := results[0].Figures.Lead
		if !(lead > c.lead[0] && lead < c.lead[1]) {
			t.Errorf("%s rings %g s ahead, meant are %v", name, lead, c.lead)
		}
		ways := waysOf(t, c.text, 16000, filter.Linear, filter.IIR)
		ways[0].Lead = lead
		p := Page{Title: name, Subjects: subjects}
		var err error
		if p.Hearing, err = hear.Take(knock(16000, 1, 3, 1.5), ways, hear.Options{Bytes: 1e6}); err != nil {
			t.Fatal(err)
		}
		x := openedPage(t, p)
		t.Run(name+": labels apart", x.labelsApart)
		t.Run(name+": narrow", x.narrow)
	}
}
