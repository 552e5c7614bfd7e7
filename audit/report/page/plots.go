package page

import (
	"bytes"
	"encoding/binary"
	"fmt"
	"hash/crc32"

	"fettle/audit/hear"
)

// PlotFile is one plot as a file.
type PlotFile struct {
	Name string // of the file, without a folder
	Data []byte
}

// PlotFiles draws every plot that the page of these subjects has, each as SVG and
// as PNG, in ink on white.
func PlotFiles(subjects []Subject) ([]PlotFile, error) { return plotFiles(charts(subjects)) }

// OnsetPlotFiles are those of the plots about the onset; nil has none.
func OnsetPlotFiles(e *hear.Excerpts) ([]PlotFile, error) { return plotFiles(aboutOnset(e)) }

func plotFiles(drawn []*chart) ([]PlotFile, error) {
	var out []PlotFile
	for _, c := range drawn {
		svg, _, _, err := c.svg(c.title, true)
		if err != nil {
			return nil, fmt.Errorf("the plot %q cannot be drawn: %w", c.title, err)
		}
		png, err := c.png()
		if err != nil {
			return nil, fmt.Errorf("the plot %q cannot be drawn: %w", c.title, err)
		}
		out = append(out, PlotFile{c.name + ".svg", []byte(header.ReplaceAllString(svg, svgStart+c.svgOpen()))}, PlotFile{c.name + ".png", signed(png)})
	}
	return out, nil
}

// Files begin so that they can be told from what others drew.
const (
	svgStart = "<!-- fettle plot -->\n"
	pngSign  = "tEXtSoftware\x00fettle"
	pngHead  = 8 + 25 // signature and first chunk
)

func (c *chart) svgOpen() string {
	return fmt.Sprintf(`<svg xmlns="http://www.w3.org/2000/svg" width="%gpt" height="%gpt" viewBox="$1">`, float64(pictureWidth), c.height().Points())
}

// IsPlot tells by its first 64 bytes whether a file is one of PlotFiles'.
func IsPlot(start []byte) bool {
	return bytes.HasPrefix(start, []byte(svgStart)) || bytes.HasPrefix(start, []byte("\x89PNG")) && bytes.Contains(start, []byte(pngSign))
}

// signed puts a text chunk that names the program behind a picture's first chunk
// (PNG specification, 11.3.4).
func signed(png []byte) []byte {
	out := bytes.Clone(png[:pngHead])
	out = binary.BigEndian.AppendUint32(out, uint32(len(pngSign)-4))
	out = append(out, pngSign...)
	out = binary.BigEndian.AppendUint32(out, crc32.ChecksumIEEE([]byte(pngSign)))
	return append(out, png[pngHead:]...)
}
