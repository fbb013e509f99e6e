package config

import (
	"bytes"
	"io"
	"os/exec"
	"slices"
	"strings"
	"testing"

	"pgregory.net/rapid"
)

// printed reads what Print writes, as a shell does.
func printed(t *testing.T, text string) []string {
	t.Helper()
	sh, err := exec.LookPath("sh")
	if err != nil {
		t.Skip("no sh here: install a POSIX shell")
	}
	// Every assignment becomes a line of the script's own environment.
	cmd := exec.Command(sh, "-a", "-c", `eval "$1" && env -0`, "sh", text)
	cmd.Env = []string{"PATH=/usr/bin:/bin"}
	out, err := cmd.Output()
	if err != nil {
		t.Fatalf("%v in:\n%s", err, text)
	}
	var list []string
	for e := range strings.SplitSeq(string(out), "\x00") {
		if strings.HasPrefix(e, prefix) {
			list = append(list, e)
		}
	}
	return list
}

// The whole configuration, printed and read again by a real shell, is the same
// one: with all that people may have set, blanks and quotes in it too.
func TestAPrintedConfigurationIsTheSame(t *testing.T) {
	set := map[string]string{
		"CADENCEWRIGHT_ADDR": "[::1]:8443", "CADENCEWRIGHT_BASE_URL": "https://plan.example.org/", "CADENCEWRIGHT_COOKIES": "never", "CADENCEWRIGHT_DB_CONNS": "31",
		"CADENCEWRIGHT_DATA": `/srv/it's "here" & $HOME/x`, "CADENCEWRIGHT_PG_BIN": "/opt/pg bin", "CADENCEWRIGHT_PLAN_EFFORT": "777", "CADENCEWRIGHT_WORKERS": "5",
		"CADENCEWRIGHT_STOP_AFTER": "1m30s", "CADENCEWRIGHT_METRICS_ADDR": "127.0.0.1:9100", "CADENCEWRIGHT_LOG_LEVEL": "WARN", "CADENCEWRIGHT_LOG_FORMAT": "json",
	}
	for name, values := range map[string]map[string]string{"defaults": {}, "all set": set} {
		want, err := FromEnv(env(values))
		if err != nil {
			t.Fatal(err)
		}
		var b bytes.Buffer
		Print(&b, env(values))
		got, err := FromEnviron(printed(t, b.String()))
		if err != nil || got != want {
			t.Errorf("%s: %+v, %v; want %+v", name, got, err, want)
		}
		for _, s := range settings {
			if strings.Count(b.String(), "\n"+s.name+"=") != 1 {
				t.Errorf("%s: %s is not printed once", name, s.name)
			}
		}
	}
}

// Whatever an environment holds, reading it ends with a configuration that
// keeps to what is allowed, or with an error in which each line names a
// variable of ours.
func TestAnyEnvironment(t *testing.T) {
	value := rapid.OneOf(rapid.String(), rapid.SampledFrom([]string{"", " ", "0", "-1", "8", "20", "1e3", "127.0.0.1:80", ":80", "https://a.example", "postgres://a/b", "debug", "json", "auto", "5s", "999999999999999999999"}))
	name := rapid.SampledFrom(append(names(), "CADENCEWRIGHT_", "CADENCEWRIGHT_NEW", "PATH"))
	rapid.Check(t, func(t *rapid.T) {
		var environ []string
		for range rapid.IntRange(0, 6).Draw(t, "variables") {
			environ = append(environ, name.Draw(t, "name")+"="+strings.ReplaceAll(value.Draw(t, "value"), "\n", ""))
		}
		c, err := FromEnviron(environ)
		if err == nil {
			if c.Workers < 1 || c.Workers > 256 || c.MaxConns < 4 || c.MaxConns > 1000 || c.PlanEffort < 1 || c.PlanEffort > 1_000_000 || c.StopAfter < 1e9 || c.Addr == "" || strings.HasSuffix(c.BaseURL, "/") {
				t.Fatalf("%q: %+v", environ, c)
			}
			return
		}
		for line := range strings.SplitSeq(err.Error(), "\n") {
			first, _, _ := strings.Cut(line, ":")
			if !slices.Contains(names(), first) && !strings.HasPrefix(first, prefix) {
				t.Fatalf("%q: %s", environ, line)
			}
		}
	})
}

// Blanks around a value are not part of it; a value of nothing else is none.
func TestBlanksAroundValues(t *testing.T) {
	c, err := FromEnv(env(map[string]string{"CADENCEWRIGHT_ADDR": "  :9 ", "CADENCEWRIGHT_WORKERS": " 3\t", "CADENCEWRIGHT_LOG_FORMAT": "  ", "DATABASE_URL": " postgres://a/b "}))
	if err != nil || c.Addr != ":9" || c.Workers != 3 || c.LogJSON || c.DatabaseURL != "postgres://a/b" {
		t.Errorf("%+v, %v", c, err)
	}
}

// The base address is kept without the slash at its end, so that links can be
// put behind it.
func TestBaseURLs(t *testing.T) {
	for in, want := range map[string]string{"https://a.example/": "https://a.example", "http://a.example:8080": "http://a.example:8080", "http://[::1]:80/": "http://[::1]:80"} {
		c, err := FromEnv(env(map[string]string{"CADENCEWRIGHT_BASE_URL": in}))
		if err != nil || c.BaseURL != want {
			t.Errorf("%s is kept as %q, %v", in, c.BaseURL, err)
		}
	}
}

// Reading does not stop at the first fault, and what is right is still there.
func TestWhatIsRightStays(t *testing.T) {
	c, err := FromEnv(env(map[string]string{"CADENCEWRIGHT_WORKERS": "none", "CADENCEWRIGHT_PLAN_EFFORT": "12", "CADENCEWRIGHT_LOG_LEVEL": "error"}))
	if err == nil || c.PlanEffort != 12 || strings.Count(err.Error(), "\n") != 0 {
		t.Errorf("%+v, %v", c, err)
	}
	if c.Logger(io.Discard).Enabled(t.Context(), 4) { // a warning
		t.Error("warnings are logged at level error")
	}
}
