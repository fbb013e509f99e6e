package main

import (
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"

	"cadencewright/scheduler"
)

// readInput reads a whole input file, or standard input for "-", of at most
// scheduler.MaxFileBytes.
func readInput(std stdio, path string) ([]byte, error) {
	if path == "-" {
		return readLimited(std.in, "standard input")
	}
	f, err := os.Open(path)
	if err != nil {
		return nil, inputError{plainPathError("reading", err)}
	}
	defer f.Close()
	// The size is looked at first: a file that is far too large is not read
	// into memory to find that out. Pipes have none and are cut off instead.
	info, err := f.Stat()
	switch {
	case err == nil && info.IsDir():
		return nil, inputError{fmt.Errorf("reading %s: it is a folder, not a file", path)}
	case err == nil && info.Size() > scheduler.MaxFileBytes:
		return nil, tooLarge(path)
	}
	return readLimited(f, path)
}

// tooLarge is the error for a file beyond the limit.
func tooLarge(name string) error {
	return inputError{fmt.Errorf("%s is larger than %d MiB; campaign and plan files are far smaller, so this is probably another kind of file",
		name, scheduler.MaxFileBytes>>20)}
}

// readLimited reads all of r, unless that is too much.
func readLimited(r io.Reader, name string) ([]byte, error) {
	const limit = scheduler.MaxFileBytes
	// One byte more than allowed tells a file that fits from one that does not.
	data, err := io.ReadAll(io.LimitReader(r, limit+1))
	if err != nil {
		return nil, inputError{fmt.Errorf("reading %s: %w", name, err)}
	}
	if len(data) > limit {
		return nil, tooLarge(name)
	}
	return data, nil
}

// plainPathError says what the system said about a path, without the name of
// the system call.
func plainPathError(doing string, err error) error {
	var p *fs.PathError
	if errors.As(err, &p) {
		return fmt.Errorf("%s %s: %w", doing, p.Path, p.Err)
	}
	return fmt.Errorf("%s: %w", doing, err)
}

// readCampaign reads and checks a campaign file.
func readCampaign(std stdio, path string) (*scheduler.Campaign, error) {
	// All problems of a file are reported together, each with its place, so
	// that one run is enough to mend it.
	data, err := readInput(std, path)
	if err != nil {
		return nil, err
	}
	c, err := scheduler.ReadCampaign(data)
	if err != nil {
		return nil, unusable("campaign", path, err)
	}
	return c, nil
}

// unusable puts a file's name above the list of its problems.
func unusable(kind, path string, err error) error {
	// A single problem stands on the same line, several in a list below.
	var problems scheduler.Problems
	if errors.As(err, &problems) && len(problems) > 1 {
		return inputError{fmt.Errorf("the %s file %s has %d problems:\n%w", kind, path, len(problems), err)}
	}
	return inputError{fmt.Errorf("the %s file %s cannot be used: %w", kind, path, err)}
}

// output is where a command's result goes: standard output, or a file that
// appears whole or not at all. It is opened before the work begins, so that a
// folder that cannot be written to is known at once.
type output struct {
	// For standard output and devices what is written is there at once.
	w    io.Writer
	name string
	// For a regular file: the file written to and the name it gets at the end.
	temp  *os.File
	final string
}

// openOutput prepares writing to path; "-" is standard output.
func openOutput(std stdio, path string) (*output, error) {
	if path == "-" {
		return &output{w: std.out, name: "standard output"}, nil
	}
	final := path
	if target, err := filepath.EvalSymlinks(path); err == nil {
		final = target // a link stays a link
	}
	info, err := os.Stat(final)
	switch {
	case err == nil && info.IsDir():
		return nil, fmt.Errorf("writing %s: it is a folder; name a file in it", path)
	case err == nil && !info.Mode().IsRegular():
		// A device or a pipe cannot be replaced by a file.
		f, err := os.OpenFile(final, os.O_WRONLY, 0)
		if err != nil {
			return nil, plainPathError("writing", err)
		}
		return &output{w: f, name: path, temp: f}, nil
	}
	// In the same folder, because only within one file system is a rename
	// all or nothing.
	f, err := createBeside(final)
	if err != nil {
		return nil, fmt.Errorf("writing %s: %w", path, rootCause(err))
	}
	o := &output{w: f, name: path, temp: f, final: final}
	if info != nil { // a file that is replaced keeps its permissions
		if err := f.Chmod(info.Mode().Perm()); err != nil {
			o.discard()
			return nil, fmt.Errorf("writing %s: %w", path, rootCause(err))
		}
	}
	return o, nil
}

// createBeside creates a hidden file with a name of its own in the folder of
// path, with the permissions that new files get (os.CreateTemp would make it
// private).
func createBeside(path string) (*os.File, error) {
	dir, base := filepath.Split(path)
	for i := 0; ; i++ {
		name := fmt.Sprintf("%s.%s.%d-%d.part", dir, base, os.Getpid(), i)
		f, err := os.OpenFile(name, os.O_CREATE|os.O_EXCL|os.O_WRONLY, 0o666)
		if !errors.Is(err, fs.ErrExist) || i == 100 {
			return f, err
		}
	}
}

// commit writes data and makes it appear under its name. On an error nothing
// has changed there.
func (o *output) commit(data []byte) error {
	// Every error is kept until the file is closed: it must be closed and
	// removed in any case.
	_, err := o.w.Write(data)
	if err == nil && o.final != "" {
		err = o.temp.Sync() // some disks find out only now that they are full
	}
	if o.temp != nil {
		if closeErr := o.temp.Close(); err == nil {
			err = closeErr
		}
	}
	// On one file system a rename is all or nothing.
	if err == nil && o.final != "" {
		err = os.Rename(o.temp.Name(), o.final)
	}
	switch {
	case err == nil:
		return nil
	case o.final == "":
		return fmt.Errorf("writing %s: %w", o.name, rootCause(err))
	}
	o.discard()
	return fmt.Errorf("writing %s: %w; the file was not changed", o.name, rootCause(err))
}

// discard removes what was written so far. After a commit it does nothing.
func (o *output) discard() {
	if o.temp == nil {
		return
	}
	// Errors do not matter any more: the file is not wanted.
	o.temp.Close()
	if o.final != "" {
		os.Remove(o.temp.Name())
	}
}

// rootCause drops the temporary file's name from a system error.
func rootCause(err error) error {
	var p *fs.PathError
	if errors.As(err, &p) {
		return p.Err
	}
	var l *os.LinkError
	if errors.As(err, &l) {
		return l.Err
	}
	return err
}
