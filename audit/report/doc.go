// Package report gives an audit's figures as text for a terminal and as JSON.
//
// Times are in milliseconds, levels in dB, frequencies in Hz. What is not
// stated is a dash in text and null in JSON, with its reason under not_stated;
// a level of -200 dB means 'none'.
package report
