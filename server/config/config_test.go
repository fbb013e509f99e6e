package config

import (
	"bytes"
	"log/slog"
	"strings"
	"testing"
	"time"

	"pgregory.net/rapid"
)

func env(m map[string]string) func(string) string { return func(k string) string { return m[k] } }

func TestDefaults(t *testing.T) {
	c, err := FromEnviron(nil)
	if err != nil {
		t.Fatal(err)
	}
	if c.Addr != "127.0.0.1:8080" || c.MetricsAddr != "" || c.LogLevel != slog.LevelInfo || c.StopAfter != 10*time.Second || c.Workers != 2 || c.MaxConns != 20 || c.Secure() {
		t.Errorf("defaults %+v", c)
	}
}

// Each setting with values that are allowed and values that are not.
func TestSettings(t *testing.T) {
	cases := map[string]struct{ good, bad []string }{
		"CADENCEWRIGHT_ADDR":         {[]string{":0", "127.0.0.1:8080", "[::1]:80", "plan.example.org:443"}, []string{"8080", "localhost", "localhost:http", ":70000", ":-1"}},
		"CADENCEWRIGHT_METRICS_ADDR": {[]string{"127.0.0.1:9100"}, []string{"9100", "x:y"}},
		"CADENCEWRIGHT_BASE_URL": {[]string{"https://plan.example.org", "http://10.0.0.1:8080/"},
			[]string{"plan.example.org", "ftp://plan.example.org", "https://", "https://plan.example.org/a", "https://u:p@plan.example.org", "https://plan.example.org?x=1"}},
		"CADENCEWRIGHT_COOKIES":     {[]string{"auto", "always", "never"}, []string{"yes"}},
		"DATABASE_URL":              {[]string{"postgres://u:p@db/x", "postgresql:///x", "host=/run user=x"}, []string{"mysql://db/hunter2", "hunter2", "hunter2:5432"}},
		"CADENCEWRIGHT_DB_CONNS":    {[]string{"4", "1000"}, []string{"3", "1001", "many", "1.5"}},
		"CADENCEWRIGHT_DATA":        {[]string{"/var/lib/x"}, nil},
		"CADENCEWRIGHT_PG_BIN":      {[]string{"/usr/lib/postgresql/15/bin"}, nil},
		"CADENCEWRIGHT_PLAN_EFFORT": {[]string{"1", "1000000"}, []string{"0", "1000001", "1e6"}},
		"CADENCEWRIGHT_WORKERS":     {[]string{"1", "256"}, []string{"0", "257"}},
		"CADENCEWRIGHT_STOP_AFTER":  {[]string{"1s", "5m"}, []string{"999ms", "6m", "10"}},
		"CADENCEWRIGHT_LOG_LEVEL":   {[]string{"debug", "warn", "ERROR"}, []string{"loud", "info+1"}},
		"CADENCEWRIGHT_LOG_FORMAT":  {[]string{"text", "json"}, []string{"xml"}},
	}
	for _, s := range settings {
		c, ok := cases[s.name]
		if !ok || len(c.good) == 0 {
			t.Errorf("%s is not tested", s.name)
		}
		for _, v := range c.good {
			if _, err := FromEnviron([]string{s.name + "=" + v}); err != nil {
				t.Errorf("%s=%s: %v", s.name, v, err)
			}
		}
		for _, v := range c.bad {
			_, err := FromEnviron([]string{s.name + "=" + v})
			if err == nil || !strings.HasPrefix(err.Error(), s.name+": ") || !strings.Contains(err.Error(), "must be") {
				t.Errorf("%s=%s: %v", s.name, v, err)
			}
			if s.secret && err != nil && strings.Contains(err.Error(), "hunter2") {
				t.Errorf("%s: the error shows the value: %v", s.name, err)
			}
		}
	}
}

func TestEveryProblemAtOnce(t *testing.T) {
	bad := map[string]string{
		"CADENCEWRIGHT_ADDR": "8080", "CADENCEWRIGHT_METRICS_ADDR": "localhost", "CADENCEWRIGHT_BASE_URL": "plan.example.org", "CADENCEWRIGHT_COOKIES": "sweet",
		"CADENCEWRIGHT_LOG_LEVEL": "loud", "CADENCEWRIGHT_LOG_FORMAT": "xml", "CADENCEWRIGHT_STOP_AFTER": "1ms", "DATABASE_URL": "mysql://x",
		"CADENCEWRIGHT_PLAN_EFFORT": "0", "CADENCEWRIGHT_WORKERS": "many", "CADENCEWRIGHT_DB_CONNS": "1", "CADENCEWRIGHT_ADRESS": ":80",
	}
	var environ []string
	for k, v := range bad {
		environ = append(environ, k+"="+v)
	}
	_, err := FromEnviron(environ)
	if err == nil {
		t.Fatal("no error")
	}
	for name := range bad {
		if !strings.Contains(err.Error(), name+": ") {
			t.Errorf("the error does not name %s:\n%v", name, err)
		}
	}
}

func TestAMisspeltSetting(t *testing.T) {
	_, err := FromEnviron([]string{"CADENCEWRIGHT_ADRESS=:80", "PATH=/bin", "CADENCEWRIGHTX=1"})
	if err == nil || !strings.Contains(err.Error(), "CADENCEWRIGHT_ADRESS") || !strings.Contains(err.Error(), "CADENCEWRIGHT_ADDR,") ||
		strings.Contains(err.Error(), "PATH: ") || strings.Contains(err.Error(), "CADENCEWRIGHTX: ") {
		t.Errorf("%v", err)
	}
}

func TestSecureCookies(t *testing.T) {
	for _, c := range []struct {
		rule, base string
		want       bool
	}{
		{"", "", false}, {"", "http://a.example", false}, {"", "https://a.example", true},
		{"always", "", true}, {"always", "http://a.example", true}, {"never", "https://a.example", false},
	} {
		cfg, err := FromEnv(env(map[string]string{"CADENCEWRIGHT_COOKIES": c.rule, "CADENCEWRIGHT_BASE_URL": c.base}))
		if err != nil || cfg.Secure() != c.want {
			t.Errorf("%q at %q: %v, want %v (%v)", c.rule, c.base, cfg.Secure(), c.want, err)
		}
	}
}

func TestPrintHidesSecrets(t *testing.T) {
	var b bytes.Buffer
	Print(&b, env(map[string]string{"DATABASE_URL": "postgres://u:hunter2@db/x", "CADENCEWRIGHT_ADDR": ":9"}))
	if strings.Contains(b.String(), "hunter2") || !strings.Contains(b.String(), "DATABASE_URL is set") {
		t.Errorf("printed:\n%s", b.String())
	}
	for _, want := range []string{"CADENCEWRIGHT_ADDR=:9\n", "CADENCEWRIGHT_WORKERS=2\n", "CADENCEWRIGHT_DATA=\n"} {
		if !strings.Contains(b.String(), want) {
			t.Errorf("%q is missing in:\n%s", want, b.String())
		}
	}
}

// What is printed can be read again and means the same.
func TestPrintedCanBeRead(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		dir := rapid.StringMatching(`/[a-zA-Z0-9 '$"._-]{0,20}[a-z]`).Draw(t, "dir")
		var b bytes.Buffer
		Print(&b, env(map[string]string{"CADENCEWRIGHT_DATA": dir}))
		at := strings.Index(b.String(), "\nCADENCEWRIGHT_DATA=")
		if at < 0 {
			t.Fatalf("not printed:\n%s", b.String())
		}
		line, _, _ := strings.Cut(b.String()[at+1:], "\n")
		value := strings.TrimPrefix(line, "CADENCEWRIGHT_DATA=")
		if strings.HasPrefix(value, "'") { // as a shell takes it off
			value = strings.ReplaceAll(value[1:len(value)-1], `'\''`, "'")
		}
		if value != dir {
			t.Fatalf("%q is printed as %s", dir, line)
		}
	})
}

func TestLogger(t *testing.T) {
	for _, c := range []struct{ format, level, want string }{
		{"text", "info", `level=INFO msg=hello n=1`},
		{"json", "info", `"msg":"hello","n":1}`},
		{"json", "warn", ""},
	} {
		cfg, err := FromEnv(env(map[string]string{"CADENCEWRIGHT_LOG_FORMAT": c.format, "CADENCEWRIGHT_LOG_LEVEL": c.level}))
		if err != nil {
			t.Fatal(err)
		}
		var b bytes.Buffer
		cfg.Logger(&b).Info("hello", "n", 1)
		if !strings.Contains(b.String(), c.want) || c.want == "" && b.Len() > 0 {
			t.Errorf("%s at %s: %q", c.format, c.level, b.String())
		}
	}
}

func TestTheLastValueCounts(t *testing.T) {
	c, err := FromEnviron([]string{"CADENCEWRIGHT_ADDR=:1", "CADENCEWRIGHT_ADDR=:2"})
	if err != nil || c.Addr != ":2" {
		t.Errorf("%q, %v", c.Addr, err)
	}
}
