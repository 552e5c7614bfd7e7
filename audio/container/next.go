package container

// knownIDs are chunk ids of the RIFF specification (1991), of EBU Tech 3285 and
// its supplements, of EBU Tech 3306, and of ITU-R BS.2088. They only help to tell a chunk from
// chance where a pad byte may be missing.
var knownIDs = map[string]bool{
	"fmt ": true, "data": true, "fact": true, "LIST": true, "JUNK": true, "PAD ": true,
	"cue ": true, "plst": true, "smpl": true, "inst": true, "wavl": true, "slnt": true,
	"bext": true, "mext": true, "qlty": true, "levl": true, "link": true, "iXML": true,
	"axml": true, "bxml": true, "chna": true, "sxml": true, "PEAK": true, "CSET": true, "DISP": true,
	"ds64": true, "r64m": true,
}

// next tells where the chunk after c begins. After an odd payload that is one
// byte later than its end, unless only the place without the pad byte looks
// like a chunk: some programs forget it.
func (p *parser) next(c Chunk) (int64, error) {
	end := c.Offset + c.Size
	if c.Size&1 == 0 {
		return end, nil
	}
	bare, err := p.likeness(end)
	if err != nil {
		return 0, err
	}
	padded, err := p.likeness(end + 1)
	if err != nil {
		return 0, err
	}
	if bare <= padded {
		return end + 1, nil
	}
	p.warn("byte %d: no pad byte after the odd-sized chunk %q", end, c.ID)
	return end, nil
}

// likeness grades how much the bytes at pos look like a chunk: 0 not at all,
// 1 plausible id and a size that fits, 2 also a known id.
func (p *parser) likeness(pos int64) (int, error) {
	c, plausible, err := p.header(pos)
	switch {
	case err != nil:
		return 0, err
	case !plausible || !p.fits(c) && c.ID != "data":
		return 0, nil
	case knownIDs[c.ID]:
		return 2, nil
	}
	return 1, nil
}

// onlyChunks tells whether nothing but chunks stands from pos to the end of
// the file, less than the head of another one aside.
func (p *parser) onlyChunks(pos int64) (bool, error) {
	start := pos
	for range maxChunks {
		if pos+headerBytes > p.size {
			break
		}
		c, plausible, err := p.header(pos)
		if err != nil || !plausible || !p.fits(c) {
			return false, err
		}
		pos = c.Offset + c.Size + c.Size&1
	}
	return pos > start || pos == p.size, nil
}
