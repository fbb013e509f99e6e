// Package config turns the environment into one checked value. Every setting
// has a useful default; all problems are reported together; a name that is no
// setting is a problem too, since it is a misspelt one; secrets are never
// printed.
package config

import (
	"errors"
	"fmt"
	"io"
	"log/slog"
	"slices"
	"strconv"
	"strings"
	"time"
)

// Config is how the service runs.
type Config struct {
	Addr        string // where pages and API are served
	MetricsAddr string // where metrics are served; empty: nowhere
	BaseURL     string // as people reach it, without a slash at the end; empty: from Addr
	DatabaseURL string // empty: a private Postgres
	DataDir     string // of the private Postgres; empty: the usual place
	PGBin       string // folder of the Postgres programs; empty: looked for
	Cookies     CookieRule
	LogLevel    slog.Level
	LogJSON     bool
	StopAfter   time.Duration // how long a stop waits for answers under way
	PlanEffort  int64         // of a planning job, thousands of changes tried
	Workers     int           // goroutines of a planning job
	MaxConns    int           // connections to the database
}

// CookieRule says when cookies are kept to https.
type CookieRule string

// The rules for cookies.
const (
	CookiesAuto   CookieRule = "auto"   // as the base URL says
	CookiesSecure CookieRule = "always" // https only
	CookiesPlain  CookieRule = "never"  // http too
)

// Secure tells whether sessions' cookies may go over https only.
func (c *Config) Secure() bool {
	if c.Cookies == CookiesAuto {
		return strings.HasPrefix(c.BaseURL, "https://")
	}
	return c.Cookies == CookiesSecure
}

// FromEnviron reads the configuration from an environment as os.Environ gives
// it. The error names every variable that is wrong, with what is allowed.
func FromEnviron(environ []string) (Config, error) {
	c, err := FromEnv(lookup(environ))
	return c, errors.Join(err, unknown(environ))
}

// FromEnv reads the configuration; getenv is os.Getenv. It cannot see
// variables that it does not ask for: FromEnviron also reports misspelt ones.
func FromEnv(getenv func(string) string) (Config, error) {
	var c Config
	var errs []error
	for _, s := range settings {
		v := strings.TrimSpace(getenv(s.name))
		if v == "" {
			v = s.fallback
		}
		if err := s.set(&c, v); err != nil {
			shown := strconv.Quote(v)
			if s.secret {
				shown = "the value"
			}
			errs = append(errs, fmt.Errorf("%s: %s: %w", s.name, shown, err))
		}
	}
	return c, errors.Join(errs...)
}

// lookup is os.Getenv over a list.
func lookup(environ []string) func(string) string {
	return func(name string) string {
		for _, e := range slices.Backward(environ) { // the last one counts
			if v, ok := strings.CutPrefix(e, name+"="); ok {
				return v
			}
		}
		return ""
	}
}

// prefix begins the names of our own variables.
const prefix = "CADENCEWRIGHT_"

// unknown names the variables that look like ours and are none.
func unknown(environ []string) error {
	var errs []error
	for _, e := range environ {
		name, _, _ := strings.Cut(e, "=")
		if !strings.HasPrefix(name, prefix) || slices.ContainsFunc(settings, func(s setting) bool { return s.name == name }) {
			continue
		}
		errs = append(errs, fmt.Errorf("%s: there is no such setting; the settings are %s", name, strings.Join(names(), ", ")))
	}
	return errors.Join(errs...)
}

func names() []string {
	var list []string
	for _, s := range settings {
		list = append(list, s.name)
	}
	return list
}

// Print writes every setting with its value and meaning, secrets left out, in
// a form that a shell can read again.
func Print(w io.Writer, getenv func(string) string) {
	for _, s := range settings {
		v := getenv(s.name)
		if v == "" {
			v = s.fallback
		}
		fmt.Fprintf(w, "# %s\n", s.usage)
		if s.secret && v != "" {
			fmt.Fprintf(w, "# %s is set; its value is not shown\n", s.name)
			continue
		}
		fmt.Fprintf(w, "%s=%s\n", s.name, quoted(v))
	}
}

// quoted is a value as a shell reads it back.
func quoted(v string) string {
	if strings.ContainsAny(v, " \t\n'\"\\$`;&|<>()*?#~") {
		return "'" + strings.ReplaceAll(v, "'", `'\''`) + "'"
	}
	return v
}

// Logger writes log lines as configured.
func (c *Config) Logger(w io.Writer) *slog.Logger {
	o := &slog.HandlerOptions{Level: c.LogLevel}
	if c.LogJSON {
		return slog.New(slog.NewJSONHandler(w, o))
	}
	return slog.New(slog.NewTextHandler(w, o))
}
