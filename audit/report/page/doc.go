// Package page shows an audit as one self-contained HTML page, and its plots
// as SVG and PNG files.
//
// The page needs no network and no other file. It gives sentences first, then
// tables, then plots. Each plot has a table behind it; what a pointer or the
// arrow keys read off a plot is a row of that table, so that the two cannot
// differ. Colours follow the reader's light or dark setting and print as ink on
// white.
//
// Where there is a recording, its strongest onset can be heard and seen in the original
// and in each output ([Page.Hearing]). Players start low and share one volume. Listening
// blind takes all that tells outputs apart out of the section until the listener's own
// tally is revealed.
//
// A chain, a capture and a pair are shown alike: see [Subject]. Times are in
// milliseconds, levels in dB, angles in degrees, frequencies in Hz.
package page
