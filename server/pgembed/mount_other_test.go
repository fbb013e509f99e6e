//go:build !linux

package pgembed

import "errors"

// mount puts a small disk in memory at a folder.
func mount(string, string) error { return errors.New("only done on Linux") }
