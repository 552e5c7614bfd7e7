// Command generate writes the demo recordings of samples/recordings: a box of
// invented tapes from the Brackwater ferry, with the faults that such tapes
// have. Run it from the repository root:
//
//	go run ./samples/generate
//
// A scene is one recording. Its programme is what somebody wanted to keep:
// phrases of speech-like sound and strikes (a slate, a gangway, a bell). Its
// background is what came along: rumble, hum, hiss, water, a DC offset.
// An onset is the first frame of a sharp sound; all onsets are written down in
// the scenes, so that a treatment can be checked against them to the sample.
//
// Levels are in dBFS: a peak level refers to full scale 1.0, a level of a
// background is 20·log10 of its RMS value. Times are in frames.
//
// Every random number comes from a generator seeded by the recording's path and
// by what the number is for, so one scene can change without the others.
package main
