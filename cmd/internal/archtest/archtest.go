// Package archtest holds the module's architecture as data: which package may
// import which, and where each outside library lives. Its test reads the real
// imports and fails on a direction that is not allowed, so that the picture in
// DEVELOPERS.md stays true.
package archtest

import "strings"

// Rule is one row of the architecture: what the packages below Path may
// import. Prefixes match whole path elements; the longest matching Path wins.
type Rule struct {
	Path string // below the module, e.g. "scheduler/verify"
	// Inside lists the module's own packages (prefixes) that may be imported.
	Inside []string
	// Not lists exceptions to Inside.
	Not []string
	Why string
}

// Rules are the allowed directions: cmd → server → {scheduler, web} → astro.
var Rules = []Rule{
	{Path: "cmd", Inside: []string{"cmd", "server", "scheduler", "astro", "migrations"},
		Why: "commands wire everything together; pages reach the web only through the server"},
	{Path: "server", Inside: []string{"server", "scheduler", "astro", "web", "migrations"},
		Why: "the service uses the planner and the pages, never the commands"},
	{Path: "server/store", Inside: []string{"scheduler", "migrations", "server/store", "server/pgembed"},
		Why: "SQL in, vocabulary out: the store plans nothing and knows no page"},
	{Path: "server/pgembed", Inside: nil,
		Why: "starting a private Postgres is a job of its own"},
	{Path: "server/config", Inside: nil, Why: "configuration is read before anything else exists"},
	{Path: "server/demo", Inside: []string{"scheduler", "astro"}, Not: []string{"scheduler/solve"},
		Why: "the demo campaign is invented input, not a plan"},
	{Path: "server/pages", Inside: []string{"server", "scheduler", "astro", "web"},
		Not: []string{"server/api"},
		Why: "pages translate between the planner's vocabulary and the view models"},
	{Path: "server/api", Inside: []string{"server", "scheduler", "astro"},
		Why: "JSON in and out; no page is needed for it"},
	{Path: "scheduler", Inside: []string{"scheduler", "astro"},
		Why: "the planner is pure and knows no service"},
	{Path: "scheduler/verify", Inside: []string{"scheduler", "astro"},
		Not: []string{"scheduler/feasible", "scheduler/solve", "scheduler/units", "scheduler/edit", "scheduler/explain", "scheduler/almanac", "scheduler/compare"},
		Why: "a re-check that shares code with the planner would share its bugs"},
	{Path: "scheduler/edit", Inside: []string{"scheduler", "astro"},
		Not: []string{"scheduler/solve", "scheduler/verify", "scheduler/explain", "scheduler/almanac"},
		Why: "a change by hand is weighed by itself: nothing is planned anew"},
	{Path: "web", Inside: []string{"web", "astro"},
		Why: "pages show view models; they never meet the planner"},
	{Path: "astro", Inside: []string{"astro"}, Why: "the sky knows nothing of plans"},
	{Path: "migrations", Inside: nil, Why: "numbered SQL and nothing else"},
}

// Homes names the only packages (prefixes below the module) that may import an
// outside library (prefix of its import path). Tests are free where TestsToo
// is false.
var Homes = []struct {
	Library string
	Homes   []string
	Why     string
}{
	{"github.com/jackc/pgx", []string{"server/store", "server/jobs"}, "SQL has one home; the job queue's driver needs the pool"},
	{"github.com/riverqueue/river", []string{"server/jobs", "server/store"}, "the queue has one home; its tables are migrated with ours"},
	{"github.com/pressly/goose", []string{"server/store"}, "migrations run in one place"},
	{"github.com/go-chi/chi", []string{"server"}, "the route table is one file; handlers take plain requests"},
	{"github.com/danielgtaylor/huma", []string{"server/api"}, "the REST description has one home"},
	{"github.com/a-h/templ", []string{"web"}, "HTML has one home"},
	{"github.com/soniakeys", []string{"astro/internal/meeus"}, "the almanac's sign and range traps are handled once"},
	{"github.com/go-pdf/fpdf", []string{"server/runsheet"}, "PDF has one home"},
	{"github.com/prometheus", []string{"server"}, "metrics are made in the service, not in the planner"},
	{"C", []string{"astro/internal/erfabench"}, "the program is built without cgo; only a comparison needs it"},
	{"golang.org/x/crypto", []string{"server/auth"}, "password hashing has one home"},
}

// Standard-library packages the pure packages must not use outside tests:
// a planner or an almanac that reads a clock or a file is not reproducible.
var (
	pure         = []string{"astro", "scheduler"}
	notPure      = []string{"os", "os/exec", "net", "net/http", "database/sql", "log", "log/slog", "math/rand"}
	randomnessIn = []string{"scheduler/solve", "scheduler/outlook"} // the only homes of math/rand/v2
)

// under reports whether path is prefix or lies below it.
func under(path, prefix string) bool {
	return path == prefix || strings.HasPrefix(path, prefix+"/")
}

// anyUnder reports whether path lies under one of the prefixes.
func anyUnder(path string, prefixes []string) bool {
	for _, p := range prefixes {
		if under(path, p) {
			return true
		}
	}
	return false
}

// ruleFor is the rule with the longest path that path lies under.
func ruleFor(path string) (Rule, bool) {
	var best Rule
	found := false
	for _, r := range Rules {
		if under(path, r.Path) && len(r.Path) >= len(best.Path) {
			best, found = r, true
		}
	}
	return best, found
}

// Violations checks one package's imports against the rules. module is the
// module's path, pkg the package's import path.
func Violations(module, pkg string, imports []string) []string {
	own := strings.TrimPrefix(strings.TrimPrefix(pkg, module), "/")
	var bad []string
	r, ok := ruleFor(own)
	if !ok {
		return []string{pkg + ": no rule says what this package may import"}
	}
	for _, imp := range imports {
		if under(imp, module) {
			in := strings.TrimPrefix(imp, module+"/")
			if !under(in, own) && (!anyUnder(in, r.Inside) || anyUnder(in, r.Not)) {
				bad = append(bad, own+" imports "+in+": "+r.Why)
			}
			continue
		}
		bad = append(bad, outside(own, imp)...)
	}
	return bad
}

// outside checks the import of a package from outside the module.
func outside(own, imp string) []string {
	var bad []string
	for _, h := range Homes {
		if under(imp, h.Library) && !anyUnder(own, h.Homes) {
			bad = append(bad, own+" imports "+imp+": "+h.Why)
		}
	}
	if anyUnder(own, pure) {
		for _, n := range notPure {
			if imp == n {
				bad = append(bad, own+" imports "+imp+": this package is pure")
			}
		}
		if imp == "math/rand/v2" && !anyUnder(own, randomnessIn) {
			bad = append(bad, own+" imports "+imp+": randomness is passed in")
		}
	}
	return bad
}
