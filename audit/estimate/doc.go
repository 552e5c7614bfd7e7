// Package estimate holds what measurements of noisy signals have in common:
// an interval for a figure, the delay between two signals, how far one clock
// runs from another, and what a response does band by band. Pure functions of
// numbers.
//
// Every interval here is a 95 % interval and is given as its half width. It
// comes from repeats of the measurement: the delete-one jackknife (Tukey 1958;
// for transfer functions and coherence Thomson and Chave 1991, "Jackknifed error
// estimates for spectra, coherences, and transfer functions"), or the residuals of
// a straight line, each with Student's t. NaN is 'not stated'.
package estimate
