//go:build !unix

package main

import "io/fs"

// inode is nothing where files have no number; their times must do.
func inode(fs.FileInfo) uint64 { return 0 }
