// Package lanes convolves.
package lanes
