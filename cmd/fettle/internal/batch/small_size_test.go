//go:build !large

package batch

// realSize asks for files beyond 4 GiB, which take a minute and the disk's space.
const realSize = false
