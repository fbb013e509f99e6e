// Package gallery holds every page with fixed data: as it should look on a good
// day (demo), with nothing to show (empty), and with more than a page should
// ever have to show (full). Tests render, compare and look at all of them, and a
// developer can open them in a browser.
//
// Sites, telescopes, people and sources are invented. The figures are made by
// simple arithmetic to look like a real week; nothing is planned or computed
// from the sky.
package gallery

import (
	"bytes"
	"io"
	"net/http"
	"time"

	"cadencewright/web/page"
	"cadencewright/web/static"
	"cadencewright/web/view"
)

// Sheet is one page of the gallery.
type Sheet struct {
	Name   string // part of its address and of its golden file
	Render func(io.Writer) error
}

// The week that the gallery shows, and the moment at which it does.
var (
	monday = time.Date(2027, time.January, 18, 0, 0, 0, 0, time.UTC)
	now    = time.Date(2027, time.January, 19, 14, 35, 0, 0, time.UTC)
)

const week = "2027-W03"

func base(path string) view.Page {
	return view.Page{
		Path: path, Person: &view.Person{Name: "Imre Oduya", Role: "coordinator"},
		Campaign: "North and south 2027", ThisWeek: week, Now: now,
	}
}

// of binds a page to its data.
func of[V any](f func(io.Writer, V) error, v V) func(io.Writer) error {
	return func(w io.Writer) error { return f(w, v) }
}

// Sheets are all pages of the gallery.
func Sheets() []Sheet {
	out := []Sheet{
		{"sign-in", of(page.SignIn, view.SignIn{Next: "/weeks/" + week})},
		{"sign-in-error", of(page.SignIn, view.SignIn{Name: "Imre Oduya", Error: "That name and password do not belong together."})},
		{"sign-in-link", of(page.SignInLink, view.SignInLink{Action: "/sign-in/abc", Name: "Imre Oduya"})},
		{"sign-in-link-used", of(page.SignInLink, view.SignInLink{Error: "This link has been used already."})},
		{"help", of(page.Help, view.Help{Page: base("/help"), BaseURL: "https://plan.example.org"})},
		{"error", of(page.Error, view.Error{
			Page: base("/weeks/2027-W99"), Status: 404, Title: "No such week",
			Detail: "2027-W99 is not a week: 2027 has 52 of them.", Advice: "Take a week from 2027-W01 to 2027-W52.", Request: "7f3a90",
		})},
	}
	out = append(out, weekSheets()...)
	out = append(out, sourceSheets()...)
	return append(out, telescopeSheets()...)
}

// Handler serves the gallery: a page at "/NAME", the static files beside them,
// and a list at "/".
func Handler() http.Handler {
	mux := http.NewServeMux()
	mux.Handle(static.Prefix, static.Handler())
	mux.HandleFunc("GET /weeks/"+week+"/job", func(w http.ResponseWriter, _ *http.Request) {
		if err := page.JobFragment(w, planningWeek().Job); err != nil {
			http.Error(w, err.Error(), http.StatusInternalServerError)
		}
	})
	index := bytes.NewBufferString("<!DOCTYPE html><html lang=en><title>Gallery</title><ul>")
	for _, s := range Sheets() {
		index.WriteString(`<li><a href="/` + s.Name + `">` + s.Name + "</a>")
		mux.HandleFunc("GET /"+s.Name, func(w http.ResponseWriter, _ *http.Request) {
			var buf bytes.Buffer
			if err := s.Render(&buf); err != nil {
				http.Error(w, err.Error(), http.StatusInternalServerError)
				return
			}
			w.Header().Set("Content-Type", "text/html; charset=utf-8")
			w.Header().Set("Content-Security-Policy", CSP)
			w.Write(buf.Bytes())
		})
	}
	mux.HandleFunc("GET /{$}", func(w http.ResponseWriter, _ *http.Request) {
		w.Header().Set("Content-Type", "text/html; charset=utf-8")
		w.Write(index.Bytes())
	})
	return mux
}

// CSP is the policy that every page must work under.
const CSP = "default-src 'self'; base-uri 'none'; form-action 'self'; frame-ancestors 'none'; object-src 'none'"
