package auth

import (
	"context"
	"errors"
	"net/http"
	"strings"
	"time"

	"cadencewright/scheduler"
)

// How many wrong passwords a name, and an address, may give in a while. A name
// that is shut out can still be signed in by a one-time link.
const (
	failuresWithin  = 15 * time.Minute
	failuresPerName = 10
	failuresPerAddr = 50
)

// SignIn checks a name and password and begins a session. addr is where the
// request came from. A wrong name, a wrong password, somebody who signs in by
// link only and somebody who is shut out all get the same answer after the
// same work.
func (a *Auth) SignIn(ctx context.Context, w http.ResponseWriter, name, password, addr string) (Identity, error) {
	// The turn comes first: those who guess at once cannot all slip past the
	// count before the first of them is counted.
	done, err := turn(ctx)
	if err != nil {
		return Identity{}, err
	}
	defer done()
	byName, byAddr := "name "+strings.ToLower(name), "addr "+addr
	if err := a.throttle(ctx, byName, failuresPerName); err != nil {
		return Identity{}, err
	}
	if err := a.throttle(ctx, byAddr, failuresPerAddr); err != nil {
		return Identity{}, err
	}
	p, err := a.store.PersonByName(ctx, name)
	if err != nil && !errors.Is(err, scheduler.ErrNotFound) {
		return Identity{}, err
	}
	hash, known := absent(), err == nil && p.PasswordHash != nil && !p.Disabled
	if known {
		hash = *p.PasswordHash
	}
	ok, err := check(hash, password)
	if err != nil {
		return Identity{}, err
	}
	if !ok || !known {
		for _, subject := range []string{byName, byAddr} {
			if err := a.store.NoteFailure(ctx, subject); err != nil {
				return Identity{}, err
			}
		}
		return Identity{}, scheduler.Errorf(scheduler.ErrUnauthenticated, "name and password do not fit")
	}
	return identityOf(p), a.begin(ctx, w, p.ID)
}

// throttle refuses a subject with too many failures.
func (a *Auth) throttle(ctx context.Context, subject string, limit int) error {
	n, err := a.store.Failures(ctx, subject, failuresWithin)
	if err == nil && n >= limit {
		err = scheduler.Errorf(scheduler.ErrTooMany, "too many wrong passwords; wait %d minutes, or ask a coordinator for a sign-in link", int(failuresWithin.Minutes()))
	}
	return err
}

// SignInByLink uses up a one-time link and begins a session.
func (a *Auth) SignInByLink(ctx context.Context, w http.ResponseWriter, token string) (Identity, error) {
	p, err := a.store.UseLink(ctx, HashToken(token))
	if errors.Is(err, scheduler.ErrNotFound) {
		return Identity{}, scheduler.Errorf(scheduler.ErrUnauthenticated, "this link is unknown, has been used or is too old; ask for another")
	}
	if err != nil {
		return Identity{}, err
	}
	return identityOf(p), a.begin(ctx, w, p.ID)
}

// Link makes a one-time link's token for a person.
func (a *Auth) Link(ctx context.Context, person int64, life time.Duration) (string, error) {
	token, hash := NewToken()
	return token, a.store.AddLink(ctx, hash, person, life)
}

// CookieName is the name of the cookie that holds a session's token.
const CookieName = "cadencewright_session"

// cookieAge is how long a browser keeps the cookie; the session itself ends as
// the store says, after a week without a request at the latest.
const cookieAge = 30 * 24 * time.Hour

// begin makes a session and its cookie.
func (a *Auth) begin(ctx context.Context, w http.ResponseWriter, person int64) error {
	token, hash := NewToken()
	if err := a.store.AddSession(ctx, hash, person); err != nil {
		return err
	}
	http.SetCookie(w, a.cookie(token, int(cookieAge.Seconds())))
	return nil
}

// cookie is one that scripts cannot read and that other sites' pages cannot
// send along with a change.
func (a *Auth) cookie(value string, ageS int) *http.Cookie {
	return &http.Cookie{Name: CookieName, Value: value, Path: "/", MaxAge: ageS, HttpOnly: true, Secure: a.secure, SameSite: http.SameSiteLaxMode}
}

// SignOut ends the session of a request; the token is worth nothing from then
// on, wherever it was copied to.
func (a *Auth) SignOut(w http.ResponseWriter, r *http.Request) error {
	if c, err := r.Cookie(CookieName); err == nil {
		if err := a.store.EndSession(r.Context(), HashToken(c.Value)); err != nil {
			return err
		}
	}
	http.SetCookie(w, a.cookie("", -1))
	return nil
}
