// Package view holds the view models of the pages: one plain struct a page,
// shaped like the page and filled by the server, and the words and figures in
// which pages say times, angles and amounts. It knows nothing of planning, of
// the database or of HTML.
//
// Instants are UTC. Angles are degrees, elevations above the horizon, and
// azimuths from north through east, unless a name says otherwise. A zero value
// means "not known" or "none" where a field's comment says so.
package view

import "time"

// Page is what all pages have in common.
type Page struct {
	Path     string    // of the request, to mark the place in the navigation
	Person   *Person   // nil: nobody has signed in
	Campaign string    // name of the live campaign; empty: there is none
	ThisWeek string    // week of now, "2027-W03", for the navigation; may be empty
	Now      time.Time // when the page was made
	Messages []Message
}

// Person is who has signed in.
type Person struct {
	Name string
	Role string // coordinator, observer or reader
}

// MessageKind is the tone of a message.
type MessageKind string

// The tones.
const (
	Note    MessageKind = "note"
	Good    MessageKind = "good"
	Caution MessageKind = "caution"
	Wrong   MessageKind = "wrong"
)

// Message is something that the page says on top, once.
type Message struct {
	Kind MessageKind
	Text string
}

// SignIn is the form for a name and a password.
type SignIn struct {
	Page
	Name  string // as typed
	Next  string // path to go to afterwards, sent back as "next"
	Error string // why the last try failed; empty: first try
}

// SignInLink is where a one-time link leads: a button that confirms, so that
// programs which look at links in messages do not use it up.
type SignInLink struct {
	Page
	Action string // path to post to; empty: the link cannot be used
	Name   string // of the person it signs in; may be empty
	Error  string // why it cannot be used
}

// Error is the page of something that went wrong.
type Error struct {
	Page
	Status  int
	Title   string // a few words
	Detail  string // one or two sentences
	Advice  string // what to do; may be empty
	Request string // identifies the request in the log; may be empty
}

// Help explains a week, the figures and the interface for scripts.
type Help struct {
	Page
	BaseURL string // "https://plan.example.org", for the examples of calls
}

// Span is a stretch of time [Start, End).
type Span struct {
	Start, End time.Time
}

// Point is an elevation at an instant.
type Point struct {
	At    time.Time
	ElDeg float64
}

// Place is a direction at an instant, for tables and tracks.
type Place struct {
	At           time.Time
	AzDeg, ElDeg float64
	SunDeg       float64 // separation from the Sun; 0: not known
}
