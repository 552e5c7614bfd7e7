//go:build !amd64 || purego

package machine

func (k Kernel) available() bool { return k == Portable }
