package page

import "fmt"

// PlotFile is one plot as a file.
type PlotFile struct {
	Name string // of the file, without a folder
	Data []byte
}

// PlotFiles draws every plot that the page of these subjects has, each as SVG and
// as PNG, in ink on white.
func PlotFiles(subjects []Subject) ([]PlotFile, error) {
	var out []PlotFile
	for _, c := range charts(subjects) {
		svg, _, _, err := c.svg(c.title, true)
		if err != nil {
			return nil, fmt.Errorf("the plot %q cannot be drawn: %w", c.title, err)
		}
		png, err := c.png()
		if err != nil {
			return nil, fmt.Errorf("the plot %q cannot be drawn: %w", c.title, err)
		}
		out = append(out, PlotFile{c.name + ".svg", []byte(svg)}, PlotFile{c.name + ".png", png})
	}
	return out, nil
}
