package main

import (
	"fmt"
	"io"
	"os"
	"time"
)

// progressLine shows how a plan gets on, on one line of a terminal that it
// writes over and over; elsewhere it shows nothing.
type progressLine struct {
	w     io.Writer // nil: nothing is shown
	now   func() time.Time
	start time.Time
	last  time.Time
	shown bool
}

// progressEvery is how often the line changes at most.
const progressEvery = 100 * time.Millisecond

// newProgressLine shows progress on w if it is a terminal.
func newProgressLine(w io.Writer) *progressLine {
	p := &progressLine{now: time.Now}
	if isTerminal(w) {
		p.w = w
	}
	p.start = p.now()
	return p
}

// isTerminal reports whether w is a character device, as a terminal is.
func isTerminal(w io.Writer) bool {
	// Anything else, such as a buffer of a test or a pipe to another program,
	// gets no progress: control characters would only be in the way.
	f, ok := w.(*os.File)
	if !ok {
		return false
	}
	info, err := f.Stat()
	return err == nil && info.Mode()&os.ModeCharDevice != 0
}

// show writes the state of the search over the line; a bound of 0 is not
// known yet.
func (p *progressLine) show(effort int64, score, bound float64) {
	if p.w == nil {
		return
	}
	now := p.now()
	if p.shown && now.Sub(p.last) < progressEvery {
		return
	}
	p.last, p.shown = now, true
	// The bound comes later than the first score, and the gap with it.
	line := fmt.Sprintf("%6.1f s  effort %d  score %.3f", now.Sub(p.start).Seconds(), effort, score)
	if bound > 0 {
		line += fmt.Sprintf("  bound %.3f  gap %.2f %%", bound, 100*gap(score, bound))
	}
	fmt.Fprintf(p.w, "\r%s\x1b[K", line) // to the line's start, and clear what is left of the old one
}

// clear removes the line.
func (p *progressLine) clear() {
	if p.w != nil && p.shown {
		fmt.Fprint(p.w, "\r\x1b[K")
	}
}

// gap is the part of the bound that the score leaves open, in [0, 1].
func gap(score, bound float64) float64 {
	if bound <= 0 {
		return 0
	}
	return max(0, (bound-score)/bound)
}
