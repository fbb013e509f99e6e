package pgembed

import "syscall"

// mount puts a small disk in memory at a folder.
func mount(dir, size string) error {
	return syscall.Mount("none", dir, "tmpfs", 0, "mode=0755,size="+size)
}
