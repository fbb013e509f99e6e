package server

import (
	"fmt"
	"net/http"

	"github.com/go-chi/chi/v5"
	"github.com/go-chi/chi/v5/middleware"

	"cadencewright/web/static"
)

// before is what stands before every handler. The order matters: what stands
// first sees the request first and the answer last.
func (s *Server) before(mux *chi.Mux) {
	mux.Use(
		s.logged,       // the request's id and its one line in the log; a panic becomes a 500
		secured,        // what every answer says to a browser about safety
		bounded,        // how much may be sent, and how long an answer may take
		compressed,     // gzip, where it is worth it
		s.sameOrigin(), // no change on behalf of another site's page
		plainPath,      // %2B in a path means what + means
		middleware.GetHead,
	)
}

// routeTable is every route but those of the API. Who may call them stands in
// the access table; a route without a row there answers nobody.
func (s *Server) routeTable(r chi.Router) {
	p := s.pages
	r.Get("/livez", live)
	r.Get("/readyz", s.answer(s.ready))
	r.Method(http.MethodGet, "/static/*", static.Handler())

	r.Get("/sign-in", s.answer(p.SignIn))
	r.Post("/sign-in", s.answer(p.DoSignIn))
	r.Get("/sign-in/{token}", s.answer(p.Link))
	r.Post("/sign-in/{token}", s.answer(p.DoLink))
	r.Post("/sign-out", s.answer(p.SignOut))
	r.Get("/help", s.answer(p.Help))

	r.Get("/", s.answer(p.Home))
	r.Get("/weeks/{week}", s.answer(p.Week))
	r.Get("/weeks/{week}/job", s.answer(p.Job))
	r.Get("/weeks/{week}/scans/{id}", s.answer(p.Scan))
	r.Post("/weeks/{week}/plan", s.answer(p.Plan))
	r.Post("/weeks/{week}/issue", s.answer(p.Issue))
	r.Post("/jobs/{id}/stop", s.answer(p.Stop))
	r.Get("/sources", s.answer(p.Sources))
	r.Get("/sources/{name}", s.answer(p.Source))
	r.Get("/telescopes", s.answer(p.Telescopes))
	r.Get("/telescopes/{code}", s.answer(p.Telescope))
	r.Get("/telescopes/{code}/nights/{night}", s.answer(p.RunSheet))
	r.Get("/telescopes/{code}/nights/{night}.csv", s.answer(p.RunSheetCSV))
}

// live tells that the program runs, whatever else is the matter.
func live(w http.ResponseWriter, _ *http.Request) {
	w.Header().Set("Cache-Control", "no-store")
	fmt.Fprintln(w, "ok")
}
