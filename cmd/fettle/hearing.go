package main

import (
	"errors"
	"path/filepath"

	"fettle/audio"
	"fettle/audit"
	"fettle/audit/hear"
	"fettle/audit/report/page"
	"fettle/filter"
	"fettle/filter/stream/machine"
)

// heardWay is a realisation to be listened to: results are its audit.
func heardWay(label string, f *filter.Filter, kernel machine.Kernel, results []*audit.Result) hear.Way {
	w := hear.Way{Label: plain(label), Filter: f, Setup: f.Setup()}
	w.Setup.Kernel = kernel
	for _, r := range results {
		if r.Rate == f.Rate() {
			w.Lead = max(w.Lead, r.Figures.Lead)
		}
	}
	return w
}

// addHearing puts excerpts of a recording into a page that has all else. Filters must
// be realised at the recording's rate.
func addHearing(p *page.Page, recording string, ways []hear.Way) error {
	room, err := p.Room(len(ways))
	if err != nil {
		return err
	}
	rec, err := audio.Open(recording)
	if err != nil {
		return err
	}
	defer rec.Close()
	p.Hearing, err = hear.Take(rec, ways, hear.Options{Name: plain(filepath.Base(recording)), Bytes: room})
	if errors.Is(err, hear.ErrNoRoom) {
		p.Notes = append(p.Notes, "Nothing can be listened to, for the page has no room left: compare fewer realisations or rates.")
		return nil
	}
	return err
}
