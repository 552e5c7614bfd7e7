package container

// Labels of chunks; that of a LIST tells its type.
const (
	labelBext  = "bext"
	labelChna  = "chna"
	labelInfo  = "LIST/INFO"
	labelMarks = "LIST/adtl"
)

// truth is what makes a chunk false, derived from what its fields mean.
type truth struct {
	samples string // why it is false if samples have changed, "": it is not
	time    string // why it is false of a stretch of the original
	note    string // what of it may tell of the original if samples have changed
}

const (
	ofSamples = "told of the original's samples"
	ofTimes   = "told times of the whole recording"
)

// truths are those of the chunks of the RIFF specification (1991), EBU Tech 3285
// and its supplements, EBU Tech 3306, ITU-R BS.2088, iXML 2.10 and AES46. Any
// other chunk stays true as far as anyone knows.
var truths = map[string]truth{
	"PEAK": {samples: ofSamples},
	"levl": {samples: ofSamples},
	"MD5 ": {samples: ofSamples},
	"md5 ": {samples: ofSamples},

	"cue ":     {time: ofTimes},
	"plst":     {time: ofTimes},
	labelMarks: {time: ofTimes},
	"r64m":     {time: ofTimes},
	"smpl":     {time: ofTimes, note: "the seams of its loops were chosen in the original"},
	"iXML":     {time: ofTimes, note: "loudness and bext fields in it are the original's"},
	"axml":     {time: ofTimes, note: "loudness in it is the original's"},
	labelChna:  {time: ofTimes},
	"qlty":     {time: ofTimes, note: "its events are the original's"},
	"cart":     {time: ofTimes, note: "its reference level is the original's"},
	"id3 ":     {note: "replay gain in it is the original's"},
	"ID3 ":     {note: "replay gain in it is the original's"},
}

// padding holds nothing; ds64 does not where it does not come first.
var padding = map[string]bool{"JUNK": true, "junk": true, "PAD ": true, "FLLR": true, "ds64": true}
