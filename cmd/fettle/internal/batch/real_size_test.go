//go:build large

package batch

const realSize = true
