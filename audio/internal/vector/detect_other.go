//go:build !amd64 || purego

package vector

func detect() Set { return None }
