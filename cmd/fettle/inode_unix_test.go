//go:build unix

package main

import (
	"io/fs"
	"syscall"
)

// inode is a file's number, which a file that replaces it does not have.
func inode(info fs.FileInfo) uint64 { return info.Sys().(*syscall.Stat_t).Ino }
