//go:build !unix

package asmtest

func fenced(n int, _ bool) []byte { return make([]byte, max(n, 1))[:n] }
