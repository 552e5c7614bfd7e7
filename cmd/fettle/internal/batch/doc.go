// Package batch renders many recordings through one chain: which files, where
// each goes, how many at once, and the treatment record that says what was
// done to each.
//
// A batch is planned before it is run. Planning finds the inputs, gives each
// its output, refuses what could harm an original or lose an output, and reads
// every header, so that the rates are known; it writes nothing. Running keeps
// one promise for each recording: its output appears whole under its name, or
// not at all, and one bad recording costs that recording only.
package batch
