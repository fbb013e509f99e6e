package gallery

import (
	"bytes"
	"flag"
	"os"
	"path/filepath"
	"regexp"
	"strings"
	"testing"

	"golang.org/x/net/html"
)

var update = flag.Bool("update", false, "write the golden files anew")

func render(t *testing.T, s Sheet) []byte {
	t.Helper()
	var buf bytes.Buffer
	if err := s.Render(&buf); err != nil {
		t.Fatalf("%s: %v", s.Name, err)
	}
	return buf.Bytes()
}

func sheet(t *testing.T, name string) Sheet {
	t.Helper()
	for _, s := range Sheets() {
		if s.Name == name {
			return s
		}
	}
	t.Fatalf("no page %q in the gallery", name)
	return Sheet{}
}

// hashes of the static files change with every edit of a style; the goldens
// need not.
var hashes = regexp.MustCompile(`(/static/[a-z.]+)\.[0-9a-f]{12}\.`)

// TestGolden holds a few pages to what they were. After a wanted change:
// go test ./web/gallery -run TestGolden -update, and read the difference.
func TestGolden(t *testing.T) {
	for _, name := range []string{"sign-in-error", "sign-in-link", "job", "week-no-campaign", "scan-done", "sources-none", "telescopes", "run-sheet-superseded", "error"} {
		t.Run(name, func(t *testing.T) {
			got := hashes.ReplaceAll(render(t, sheet(t, name)), []byte("$1.HASH."))
			// One element a line, so that a difference can be read.
			got = append(bytes.ReplaceAll(got, []byte("><"), []byte(">\n<")), '\n')
			path := filepath.Join("testdata", "golden", name+".html")
			if *update {
				if err := os.MkdirAll(filepath.Dir(path), 0o755); err != nil {
					t.Fatal(err)
				}
				if err := os.WriteFile(path, got, 0o644); err != nil {
					t.Fatal(err)
				}
				return
			}
			want, err := os.ReadFile(path)
			if err != nil {
				t.Fatal(err)
			}
			if !bytes.Equal(got, want) {
				t.Errorf("the page differs from %s at:\n%s", path, firstDifference(string(got), string(want)))
			}
		})
	}
}

func firstDifference(got, want string) string {
	g, w := strings.Split(got, "\n"), strings.Split(want, "\n")
	for i := range g {
		if i >= len(w) || g[i] != w[i] {
			old := "(nothing)"
			if i < len(w) {
				old = w[i]
			}
			return "got  " + g[i][:min(300, len(g[i]))] + "\nwant " + old[:min(300, len(old))]
		}
	}
	return "got less than wanted"
}

// walk calls f on every element.
func walk(n *html.Node, f func(*html.Node)) {
	if n.Type == html.ElementNode {
		f(n)
	}
	for c := n.FirstChild; c != nil; c = c.NextSibling {
		walk(c, f)
	}
}

func attr(n *html.Node, name string) (string, bool) {
	for _, a := range n.Attr {
		if a.Key == name {
			return a.Val, true
		}
	}
	return "", false
}

// TestStructure checks of every page what a browser would not complain about:
// nothing that the policy forbids, ids once, every reference to an id kept,
// every field named, every form to this server, every picture described.
func TestStructure(t *testing.T) {
	for _, s := range Sheets() {
		t.Run(s.Name, func(t *testing.T) {
			doc, err := html.Parse(bytes.NewReader(render(t, s)))
			if err != nil {
				t.Fatal(err)
			}
			ids := map[string]int{}
			labelled := map[string]bool{}
			walk(doc, func(n *html.Node) {
				if id, ok := attr(n, "id"); ok {
					ids[id]++
				}
				if f, ok := attr(n, "for"); ok && n.Data == "label" {
					labelled[f] = true
				}
			})
			for id, n := range ids {
				if n > 1 {
					t.Errorf("id %q stands %d times", id, n)
				}
			}
			walk(doc, func(n *html.Node) { checkElement(t, n, ids, labelled) })
		})
	}
}

func checkElement(t *testing.T, n *html.Node, ids map[string]int, labelled map[string]bool) {
	for _, a := range n.Attr {
		switch {
		case a.Key == "style" || strings.HasPrefix(a.Key, "on"):
			t.Errorf("<%s> has %s, which the policy forbids", n.Data, a.Key)
		case a.Key == "aria-labelledby" || a.Key == "aria-describedby":
			for id := range strings.FieldsSeq(a.Val) {
				if ids[id] == 0 {
					t.Errorf("<%s %s=%q> refers to nothing", n.Data, a.Key, a.Val)
				}
			}
		case (a.Key == "href" || a.Key == "src" || a.Key == "action") && !local(a.Val):
			t.Errorf("<%s %s=%q> leads elsewhere", n.Data, a.Key, a.Val)
		case a.Key == "href" && strings.HasPrefix(a.Val, "#") && ids[a.Val[1:]] == 0:
			t.Errorf("link to %s, which is not on the page", a.Val)
		}
	}
	switch n.Data {
	case "script":
		if n.FirstChild != nil {
			t.Error("a script stands in the page")
		}
	case "style":
		t.Error("a style stands in the page")
	case "input", "select":
		id, _ := attr(n, "id")
		if kind, _ := attr(n, "type"); kind != "hidden" && !labelled[id] {
			t.Errorf("<%s id=%q> has no label", n.Data, id)
		}
	case "svg":
		if class, _ := attr(n, "class"); strings.HasPrefix(class, "plot") && (n.FirstChild == nil || n.FirstChild.Data != "title") {
			t.Errorf("picture %q has no title", class)
		}
	}
}

func local(url string) bool {
	return strings.HasPrefix(url, "/") && !strings.HasPrefix(url, "//") || strings.HasPrefix(url, "#") || strings.HasPrefix(url, "?")
}

// TestWords looks for what each page must say.
func TestWords(t *testing.T) {
	for _, c := range []struct {
		page string
		want []string
	}{
		{"sign-in-error", []string{`value="Imre Oduya"`, "do not belong together"}},
		{"sign-in-link", []string{`action="/sign-in/abc"`, `method="post"`, "Continue"}},
		{"week", []string{"Draft 42", "Issue to the telescopes", `name="version" value="3"`, "no plan can earn more", "could gain 1.26 at the very most", "13 of 24 met", "It is never up in a block"}},
		{"week-issued", []string{"Revision 2", "telescopes observe it", "Plan again"}},
		{"week-planning", []string{`action="/jobs/7/stop"`, "37 % of the effort", "Best score so far 69.2, bound 74.6", `aria-live="polite"`, "See how far it is"}},
		{"week-no-plan", []string{"No plan yet", "Plan this week"}},
		{"week-no-blocks", []string{"No blocks in this week", "cadencewright import"}},
		{"week-no-campaign", []string{"No campaign yet", "cadencewright import"}},
		{"week-full", []string{"Two blocks were added", "was issued by Hanne Solberg", "Other plans of this week (9)"}},
		{"scan-done", []string{"wind", "Stowed for gusts", "31 min", "partial", "15:35", "00:54"}},
		{"sources-none", []string{"No source matches"}},
		{"source", []string{"Coming passages", "superior conjunction", "2 of 5 orbits had"}},
		{"source-idle", []string{"No goal names this source", "never"}},
		{"telescope-bare", []string{"No horizon mask", "No block starts", "None yet"}},
		{"run-sheet", []string{"Before anything moves", "turn 1", "LST", "S/N 84.2", "revision 2", "nights/2027-01-19.csv", "Lost:"}},
		{"run-sheet-superseded", []string{"Superseded.", "Revision 3"}},
		{"run-sheet-none", []string{"Nothing to observe", "none issued"}},
		{"help", []string{"never point near the Sun", "Idempotency-Key", "/api/v1/openapi.json"}},
	} {
		// White space differs between source and page.
		body := strings.Join(strings.Fields(string(render(t, sheet(t, c.page)))), " ")
		for _, w := range c.want {
			if !strings.Contains(body, w) && !strings.Contains(html.UnescapeString(body), w) {
				t.Errorf("%s does not say %q", c.page, w)
			}
		}
	}
}

// TestReaderCannotPlan: the buttons are for those who may.
func TestReaderCannotPlan(t *testing.T) {
	v := demoWeek("draft")
	v.MayPlan = false
	body := string(render(t, Sheet{"reader", of(pageWeek, v)}))
	for _, bad := range []string{"Issue to the telescopes", "Plan again", "/plan\"", "/issue\""} {
		if strings.Contains(body, bad) {
			t.Errorf("a reader is offered %q", bad)
		}
	}
}

// TestNamesAreEscaped puts markup where names stand.
func TestNamesAreEscaped(t *testing.T) {
	const evil = `"><script>alert(1)</script>`
	w := demoWeek("draft")
	w.Query, w.Person.Name, w.Campaign = evil, evil, evil
	w.Blocks[0].Name, w.Blocks[0].Label, w.Blocks[0].Scans[0].Source = evil, evil, evil
	w.Needs[0].Source, w.Needs[0].Reasons = evil, []string{evil}
	w.Telescopes[0].Name, w.Telescopes[0].Code = evil, evil
	if body := string(render(t, Sheet{"evil", of(pageWeek, w)})); strings.Contains(body, "<script>alert") {
		t.Error("a name became markup")
	}
}

// TestFullPagesStaySmall keeps the overfull week below what a poor line bears.
func TestFullPagesStaySmall(t *testing.T) {
	if n := gzipped(t, render(t, sheet(t, "week-full"))); n > 300_000 {
		t.Errorf("the overfull week has %d bytes compressed, 300000 are allowed", n)
	}
}
