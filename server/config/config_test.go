package config

import (
	"bytes"
	"log/slog"
	"strings"
	"testing"
	"time"
)

func env(m map[string]string) func(string) string { return func(k string) string { return m[k] } }

func TestDefaults(t *testing.T) {
	c, err := FromEnv(env(nil))
	if err != nil {
		t.Fatal(err)
	}
	if c.Addr != "127.0.0.1:8080" || c.MetricsAddr != "" || c.LogLevel != slog.LevelInfo || c.StopAfter != 10*time.Second || c.Workers != 2 {
		t.Errorf("defaults %+v", c)
	}
}

func TestEveryProblemAtOnce(t *testing.T) {
	_, err := FromEnv(env(map[string]string{
		"CADENCEWRIGHT_ADDR": "8080", "CADENCEWRIGHT_METRICS_ADDR": "localhost", "CADENCEWRIGHT_BASE_URL": "plan.example.org",
		"CADENCEWRIGHT_LOG_LEVEL": "loud", "CADENCEWRIGHT_LOG_FORMAT": "xml", "CADENCEWRIGHT_STOP_AFTER": "1ms",
		"CADENCEWRIGHT_PLAN_EFFORT": "0", "CADENCEWRIGHT_WORKERS": "many", "CADENCEWRIGHT_DB_CONNS": "1",
	}))
	if err == nil {
		t.Fatal("no error")
	}
	for _, s := range settings {
		if s.set == nil || s.usage == "" {
			t.Errorf("%s has no meaning", s.name)
		}
		switch s.name {
		case "DATABASE_URL", "CADENCEWRIGHT_DATA", "CADENCEWRIGHT_PG_BIN":
			continue // any text will do
		}
		if !strings.Contains(err.Error(), s.name+":") {
			t.Errorf("the error does not name %s:\n%v", s.name, err)
		}
	}
}

func TestPrintHidesSecrets(t *testing.T) {
	var b bytes.Buffer
	Print(&b, env(map[string]string{"DATABASE_URL": "postgres://u:hunter2@db/x", "CADENCEWRIGHT_ADDR": ":9"}))
	if strings.Contains(b.String(), "hunter2") {
		t.Error("the password is printed")
	}
	if !strings.Contains(b.String(), "CADENCEWRIGHT_ADDR=:9\n") || !strings.Contains(b.String(), "CADENCEWRIGHT_WORKERS=2\n") {
		t.Errorf("printed:\n%s", b.String())
	}
}
