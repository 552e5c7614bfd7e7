package container

import (
	"bytes"
	"errors"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
)

// read is a chunk of a file with its bytes.
type read struct {
	id      string
	payload []byte
}

// content lists the chunks of a file but for those that make up the container;
// the data stand in it by name only.
func content(t testing.TB, file []byte) (out []read) {
	t.Helper()
	l := mustParse(t, file)
	for _, c := range l.Chunks {
		switch {
		case c.Offset == l.Data.Offset:
			out = append(out, read{"data", nil})
		case c.ID != "fmt " && c.ID != "fact" && c.ID != "JUNK" && c.ID != "ds64":
			out = append(out, read{c.ID, file[c.Offset : c.Offset+c.Size]})
		}
	}
	return out
}

// carried writes an output with what a change leaves of a file's chunks, and
// gives the content that it has then; without the data if nothing follows it.
func carried(t testing.TB, file []byte, c Change) (*Carriage, []read) {
	t.Helper()
	carriage, err := Carry(bytes.NewReader(file), mustParse(t, file), c)
	if err != nil {
		t.Fatal(err)
	}
	o := mustOutline(t, Plan{Format: c.Format, Frames: c.Frames, Carriage: carriage})
	out := written(t, o)
	if !bytes.Equal(out, written(t, o)) {
		t.Error("written again it is another file")
	}
	l := mustParse(t, out)
	checkWarnings(t, l.Warnings)
	if l.Frames() != c.Frames || l.Form != o.Form() {
		t.Errorf("%s, %d frames; want %s, %d", l.Form, l.Frames(), o.Form(), c.Frames)
	}
	got := content(t, out)
	if last := len(got) - 1; got[last].id == "data" {
		got = got[:last]
	}
	return carriage, got
}

// list is the payload of a LIST with chunks in it.
func list(kind string, chunks ...[]byte) []byte {
	return append([]byte(kind), bytes.Join(chunks, nil)...)
}

// archive has a chunk of every kind that is told apart, on both sides of the
// data, some of odd size, some twice, and what the container needs among them.
func archive() []byte {
	return riff(
		chunk("JUNK", samples(28)),
		chunk("PAD ", samples(9)),
		chunk("iXML", []byte("<BWFXML/>")),
		stereo(),
		chunk("PEAK", samples(24)),
		chunk("fact", samples(12)),
		chunk("FLLR", samples(100)),
		chunk("LIST", list("INFO", chunk("INAM", []byte("dawn\x00")), chunk("ISFT", []byte("recorder")))),
		chunk("zzzz", samples(3)),
		chunk("data", samples(16)),
		chunk("cue ", samples(28)),
		chunk("LIST", list("adtl", chunk("labl", samples(9)))),
		chunk("LIST", list("\x00\x00\x00\x00")),
		chunk("LIST", samples(3)),
		chunk("smpl", samples(60)),
		chunk("data", samples(4)),
		chunk("levl", samples(120)),
		chunk("MD5 ", samples(16)),
		chunk("id3 ", samples(11)),
		chunk("axml", samples(13)),
		chunk("chna", samples(44)),
		chunk("zzzz", samples(5)),
		chunk("inst", samples(7)),
		chunk("fact", samples(4)),
	)
}

// without drops chunks by id and, of LIST, type.
func without(all []read, ids ...string) (out []read) {
	for _, r := range all {
		kept := true
		for _, id := range ids {
			kept = kept && !strings.HasPrefix(r.id+"/"+string(r.payload), id)
		}
		if kept {
			out = append(out, r)
		}
	}
	return out
}

// unsaid are notes without a reason.
func unsaid(chunks ...string) (out []Note) {
	for _, c := range chunks {
		out = append(out, Note{c, ""})
	}
	return out
}

// TestCarry: what stays is the same bytes in the same order, on the same side of
// the data; and all is accounted for.
func TestCarry(t *testing.T) {
	all := content(t, archive())
	for i, r := range all { // of the two data chunks the second is not the recording
		if r.id == "data" && r.payload != nil {
			all = append(all[:i:i], all[i+1:]...)
			break
		}
	}
	all = without(all, "FLLR", "PAD ")
	treated, widened, narrowed, stretch := unchanged, unchanged, unchanged, unchanged
	treated.Samples = true
	widened.Format.Bytes, widened.Format.ValidBits = 4, 16
	narrowed.Format.ValidBits = 12
	stretch.From, stretch.Frames = 1, 2
	padding, filler := Note{"PAD ", "padding"}, Note{"FLLR", "padding"}
	second := Note{"data", "only the first data chunk is the recording"}
	stale := []Note{padding, {"PEAK", ofSamples}, filler, second, {"levl", ofSamples}, {"MD5 ", ofSamples}}
	told := []Note{
		{"iXML", truths["iXML"].note}, {"LIST/INFO", ""}, {"zzzz", ""}, {"cue ", ""}, {"LIST/adtl", ""}, {"LIST", ""}, {"LIST", ""}, {"smpl", truths["smpl"].note},
		{"id3 ", truths["id3 "].note}, {"axml", truths["axml"].note}, {"chna", ""}, {"zzzz", ""}, {"inst", ""},
	}
	tests := []struct {
		name    string
		change  Change
		want    []read
		kept    []Note
		dropped []Note
	}{
		{"untouched", unchanged, all,
			unsaid("iXML", "PEAK", "LIST/INFO", "zzzz", "cue ", "LIST/adtl", "LIST", "LIST", "smpl", "levl", "MD5 ", "id3 ", "axml", "chna", "zzzz", "inst"),
			[]Note{padding, filler, second}},
		{"treated", treated, without(all, "PEAK", "levl", "MD5"), told, stale},
		{"widened", widened, without(all, "PEAK", "levl", "MD5"), told, stale},
		{"narrowed", narrowed, without(all, "PEAK", "levl", "MD5"), told, stale},
		{"stretch", stretch, without(all, "PEAK", "levl", "MD5", "iXML", "cue", "LIST/adtl", "smpl", "axml", "chna"),
			[]Note{{"LIST/INFO", ""}, {"zzzz", ""}, {"LIST", ""}, {"LIST", ""}, {"id3 ", truths["id3 "].note}, {"zzzz", ""}, {"inst", ""}},
			[]Note{padding, {"iXML", ofTimes}, {"PEAK", ofSamples}, filler, {"cue ", ofTimes}, {"LIST/adtl", ofTimes}, {"smpl", ofTimes}, second,
				{"levl", ofSamples}, {"MD5 ", ofSamples}, {"axml", ofTimes}, {"chna", ofTimes}}},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			c, got := carried(t, archive(), test.change)
			if d := cmp.Diff(test.want, got, cmp.AllowUnexported(read{})); d != "" {
				t.Errorf("content (-want +got):\n%s", d)
			}
			if d := cmp.Diff(test.kept, c.Kept); d != "" {
				t.Errorf("kept (-want +got):\n%s", d)
			}
			if d := cmp.Diff(test.dropped, c.Dropped); d != "" {
				t.Errorf("dropped (-want +got):\n%s", d)
			}
			if len(c.Corrected) != 0 {
				t.Errorf("corrected %v", c.Corrected)
			}
		})
	}
}

// TestContainerChunksStayInPlace: fmt and fact stand where they stood, fact only
// once, and says how many frames the output has.
func TestContainerChunksStayInPlace(t *testing.T) {
	file := riff(chunk("aaaa", samples(2)), stereo(), chunk("bbbb", samples(2)), chunk("fact", samples(4)), chunk("cccc", samples(2)), chunk("data", samples(16)), chunk("dddd", samples(2)), chunk("fact", samples(4)))
	c, err := Carry(bytes.NewReader(file), mustParse(t, file), unchanged)
	if err != nil {
		t.Fatal(err)
	}
	for float, want := range map[bool]string{false: "JUNK aaaa fmt  bbbb fact cccc data dddd", true: "JUNK aaaa fmt  bbbb fact cccc data dddd"} {
		f := stereo16
		if f.Float = float; float {
			f.Bytes, f.ValidBits = 4, 32
		}
		out := written(t, mustOutline(t, Plan{Format: f, Frames: 4, Carriage: c}))
		if got := ids(mustParse(t, out)); got != want || !bytes.Contains(out, []byte("fact\x04\x00\x00\x00\x04\x00\x00\x00")) {
			t.Errorf("%s\nwant %s\nin % x", got, want, out)
		}
	}
	c.head = c.head[:3] // without fact
	float := Format{Float: true, Channels: 2, Rate: 48000, Bytes: 4, ValidBits: 32}
	for f, want := range map[Format]string{float: "JUNK aaaa fmt  fact bbbb data dddd", stereo16: "JUNK aaaa fmt  bbbb data dddd"} {
		if got := ids(mustParse(t, written(t, mustOutline(t, Plan{Format: f, Frames: 4, Carriage: c})))); got != want {
			t.Errorf("%s\nwant %s", got, want)
		}
	}
}

func ids(l *Layout) string {
	var all []string
	for _, c := range l.Chunks {
		all = append(all, c.ID)
	}
	return strings.Join(all, " ")
}

// TestFormIsKept: BW64 stays, RF64 that fits in RIFF becomes that.
func TestFormIsKept(t *testing.T) {
	for form, want := range map[Form]Form{RIFF: RIFF, RF64: RIFF, BW64: BW64} {
		file := append([]byte(form), rf64(ds64(80, 8, 2), stereo(), unknown("data", samples(8)))[4:]...)
		if form == RIFF {
			file = riff(stereo(), chunk("data", samples(8)))
		}
		c, err := Carry(bytes.NewReader(file), mustParse(t, file), Change{Format: stereo16, Frames: 2})
		if err != nil {
			t.Fatal(err)
		}
		if o := mustOutline(t, Plan{Format: stereo16, Frames: 2, Carriage: c}); o.Form() != want || len(c.Dropped) != 0 {
			t.Errorf("%s becomes %s, want %s; dropped %v", form, o.Form(), want, c.Dropped)
		}
	}
}

func TestCutChunkIsCarried(t *testing.T) {
	file := riff(stereo(), chunk("data", samples(16)), sized("iXML", 50, []byte("<BWF")))
	c, got := carried(t, file, unchanged)
	if len(got) != 2 || !bytes.Equal(got[1].payload, []byte("<BWF")) {
		t.Errorf("carried %v", got)
	}
	if len(c.Corrected) != 1 || c.Corrected[0].Why != "the original ends inside it, its size now says so" {
		t.Errorf("corrected %v", c.Corrected)
	}
}

// TestCarryNeedsFramesOfTheRecording as its caller has to see to.
func TestCarryNeedsFramesOfTheRecording(t *testing.T) {
	file := riff(stereo(), chunk("data", samples(16)))
	l := mustParse(t, file)
	for _, c := range []Change{{Frames: 0}, {Frames: 5}, {From: -1, Frames: 4}, {From: 1, Frames: 4}, {From: 5, Frames: 1}, {From: 1 << 62, Frames: 1 << 62}} {
		func() {
			defer func() {
				if said, _ := recover().(string); !strings.Contains(said, "do not lie within the 4") {
					t.Errorf("%+v: %q", c, said)
				}
			}()
			Carry(bytes.NewReader(file), l, c)
		}()
	}
}

func TestCarryTellsOfReading(t *testing.T) {
	file := riff(chunk("bext", samples(700)), stereo(), chunk("data", samples(16)), chunk("LIST", samples(9)))
	l := mustParse(t, file)
	cause := errors.New("disk on fire")
	for _, limit := range []int64{100, 770} { // in bext, in LIST
		if _, err := Carry(failing{file, limit, cause}, l, unchanged); !errors.Is(err, cause) {
			t.Errorf("failing from byte %d on: %v", limit, err)
		}
	}
}

// TestTooLongToCorrect: memory is bounded, whatever a chunk's size.
func TestTooLongToCorrect(t *testing.T) {
	const size = 1 << 31
	head := riff(stereo(), chunk("data", samples(16)), sized("bext", size, nil))
	r := sparse{int64(len(head)) + size, []piece{{0, head}}}
	l, err := Parse(r, r.size)
	if err != nil {
		t.Fatal(err)
	}
	c, err := Carry(r, l, unchanged)
	if err != nil || len(c.Dropped) != 1 || !strings.Contains(c.Dropped[0].Why, "2147483648 bytes are more than") {
		t.Errorf("%v, %v", c.Dropped, err)
	}
}
