// Package config turns the environment into one checked value. Every setting
// has a useful default; all problems are reported together; secrets are never
// printed.
package config

import (
	"errors"
	"fmt"
	"io"
	"log/slog"
	"net"
	"net/url"
	"strconv"
	"strings"
	"time"
)

// Config is how the service runs.
type Config struct {
	Addr        string // where pages and API are served
	MetricsAddr string // where metrics are served; empty: nowhere
	BaseURL     string // as people reach it; empty: from Addr
	DatabaseURL string // empty: a private Postgres
	DataDir     string // of the private Postgres; empty: the usual place
	PGBin       string // folder of the Postgres programs; empty: looked for
	LogLevel    slog.Level
	LogJSON     bool
	StopAfter   time.Duration // how long a stop waits for answers under way
	PlanEffort  int64         // of a planning job, thousands of transitions
	Workers     int           // goroutines of a planning job
	MaxConns    int           // connections to the database
}

// setting is one variable of the environment.
type setting struct {
	name, usage, fallback string
	secret                bool
	set                   func(*Config, string) error
}

var settings = []setting{
	{"CADENCEWRIGHT_ADDR", "host:port to serve pages and API on", "127.0.0.1:8080", false, func(c *Config, v string) error { c.Addr = v; return hostPort(v) }},
	{"CADENCEWRIGHT_METRICS_ADDR", "host:port to serve Prometheus metrics on; empty: off", "", false, func(c *Config, v string) error {
		c.MetricsAddr = v
		if v == "" {
			return nil
		}
		return hostPort(v)
	}},
	{"CADENCEWRIGHT_BASE_URL", "the address people use, such as https://plan.example.org; empty: made from the address served on", "", false, func(c *Config, v string) error {
		c.BaseURL = strings.TrimSuffix(v, "/")
		if v == "" {
			return nil
		}
		u, err := url.Parse(v)
		if err != nil || u.Scheme != "http" && u.Scheme != "https" || u.Host == "" {
			return errors.New("must be http:// or https:// and a host")
		}
		return nil
	}},
	{"DATABASE_URL", "the Postgres to use; empty: a private one", "", true, func(c *Config, v string) error { c.DatabaseURL = v; return nil }},
	{"CADENCEWRIGHT_DATA", "folder of the private Postgres; empty: the usual place for data", "", false, func(c *Config, v string) error { c.DataDir = v; return nil }},
	{"CADENCEWRIGHT_PG_BIN", "folder of initdb and postgres; empty: looked for", "", false, func(c *Config, v string) error { c.PGBin = v; return nil }},
	{"CADENCEWRIGHT_LOG_LEVEL", "debug, info, warn or error", "info", false, func(c *Config, v string) error { return c.LogLevel.UnmarshalText([]byte(v)) }},
	{"CADENCEWRIGHT_LOG_FORMAT", "text or json", "text", false, func(c *Config, v string) error {
		c.LogJSON = v == "json"
		if v != "json" && v != "text" {
			return errors.New("must be text or json")
		}
		return nil
	}},
	{"CADENCEWRIGHT_STOP_AFTER", "how long a stop waits for answers under way", "10s", false, func(c *Config, v string) (err error) {
		c.StopAfter, err = time.ParseDuration(v)
		if err == nil && (c.StopAfter < time.Second || c.StopAfter > 5*time.Minute) {
			err = errors.New("must be 1s to 5m")
		}
		return err
	}},
	{"CADENCEWRIGHT_PLAN_EFFORT", "effort of a planning job, in thousands of transitions", "6000", false, func(c *Config, v string) error {
		n, err := whole(v, 1, 1_000_000)
		c.PlanEffort = int64(n)
		return err
	}},
	{"CADENCEWRIGHT_WORKERS", "goroutines of a planning job", "2", false, func(c *Config, v string) (err error) { c.Workers, err = whole(v, 1, 256); return err }},
	{"CADENCEWRIGHT_DB_CONNS", "connections to the database", "20", false, func(c *Config, v string) (err error) { c.MaxConns, err = whole(v, 4, 1000); return err }},
}

func hostPort(v string) error {
	_, port, err := net.SplitHostPort(v)
	if err != nil {
		return errors.New("must be host:port, such as 127.0.0.1:8080")
	}
	_, err = whole(port, 0, 65535)
	return err
}

func whole(v string, lo, hi int) (int, error) {
	n, err := strconv.Atoi(v)
	if err != nil || n < lo || n > hi {
		return 0, fmt.Errorf("must be a whole number from %d to %d", lo, hi)
	}
	return n, nil
}

// FromEnv reads the configuration; getenv is os.Getenv. The error names every
// variable that is wrong, with what is allowed.
func FromEnv(getenv func(string) string) (Config, error) {
	var c Config
	var errs []error
	for _, s := range settings {
		v := getenv(s.name)
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

// Print writes every setting with its value and meaning, secrets left out.
func Print(w io.Writer, getenv func(string) string) {
	for _, s := range settings {
		v := getenv(s.name)
		switch {
		case s.secret && v != "":
			v = "(set, not shown)"
		case v == "":
			v = s.fallback
		}
		fmt.Fprintf(w, "# %s\n%s=%s\n", s.usage, s.name, v)
	}
}

// Logger writes log lines as configured.
func (c *Config) Logger(w io.Writer) *slog.Logger {
	o := &slog.HandlerOptions{Level: c.LogLevel}
	if c.LogJSON {
		return slog.New(slog.NewJSONHandler(w, o))
	}
	return slog.New(slog.NewTextHandler(w, o))
}
