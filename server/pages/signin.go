package pages

import (
	"errors"
	"io"
	"net"
	"net/http"
	"strings"

	"cadencewright/scheduler"
	"cadencewright/web/page"
	"cadencewright/web/view"
)

// SignIn is the form.
func (p *Pages) SignIn(w http.ResponseWriter, r *http.Request) error {
	return p.signIn(w, r, http.StatusOK, view.SignIn{Next: within(r.URL.Query().Get("next"))})
}

func (p *Pages) signIn(w http.ResponseWriter, r *http.Request, status int, v view.SignIn) error {
	v.Page = p.frame(r)
	return write(w, status, func(b io.Writer) error { return page.SignIn(b, v) })
}

// within is a path of this service, or the start page: a sign-in must not lead
// elsewhere.
func within(next string) string {
	if !strings.HasPrefix(next, "/") || strings.HasPrefix(next, "//") || strings.HasPrefix(next, "/\\") || strings.ContainsAny(next, "\r\n") {
		return "/"
	}
	return next
}

// DoSignIn checks a name and password; what was typed stays on the form.
func (p *Pages) DoSignIn(w http.ResponseWriter, r *http.Request) error {
	if err := r.ParseForm(); err != nil {
		return scheduler.Errorf(scheduler.ErrInvalid, "the form cannot be read: %w", err)
	}
	name, next := strings.TrimSpace(r.PostForm.Get("name")), within(r.PostForm.Get("next"))
	addr, _, err := net.SplitHostPort(r.RemoteAddr)
	if err != nil {
		addr = r.RemoteAddr
	}
	_, err = p.auth.SignIn(r.Context(), w, name, r.PostForm.Get("password"), addr)
	switch {
	case errors.Is(err, scheduler.ErrUnauthenticated):
		return p.signIn(w, r, http.StatusUnauthorized, view.SignIn{Name: name, Next: next, Error: err.Error()})
	case errors.Is(err, scheduler.ErrTooMany):
		return p.signIn(w, r, http.StatusTooManyRequests, view.SignIn{Name: name, Next: next, Error: err.Error()})
	case err != nil:
		return err
	}
	http.Redirect(w, r, next, http.StatusSeeOther)
	return nil
}

// Link is where a one-time link leads: a button, so that a program that looks
// at links does not use it up.
func (p *Pages) Link(w http.ResponseWriter, r *http.Request) error {
	v := view.SignInLink{Page: p.frame(r), Action: r.URL.EscapedPath()}
	return write(w, http.StatusOK, func(b io.Writer) error { return page.SignInLink(b, v) })
}

// DoLink uses the link up.
func (p *Pages) DoLink(w http.ResponseWriter, r *http.Request) error {
	_, err := p.auth.SignInByLink(r.Context(), w, r.PathValue("token"))
	if errors.Is(err, scheduler.ErrUnauthenticated) {
		v := view.SignInLink{Page: p.frame(r), Error: err.Error()}
		return write(w, http.StatusUnauthorized, func(b io.Writer) error { return page.SignInLink(b, v) })
	}
	if err != nil {
		return err
	}
	http.Redirect(w, r, "/", http.StatusSeeOther)
	return nil
}

// SignOut ends the session.
func (p *Pages) SignOut(w http.ResponseWriter, r *http.Request) error {
	if err := p.auth.SignOut(w, r); err != nil {
		return err
	}
	http.Redirect(w, r, "/sign-in", http.StatusSeeOther)
	return nil
}
