package gallery

import (
	"context"
	_ "embed"
	"fmt"
	"net/http/httptest"
	"os"
	"os/exec"
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"time"

	"github.com/chromedp/cdproto/cdp"
	"github.com/chromedp/cdproto/emulation"
	"github.com/chromedp/chromedp"
)

//go:embed testdata/axe.min.js
var axe string

// browserPath finds a browser; without one the test is skipped, and fails where
// the environment says that everything must be there.
func browserPath(t *testing.T) string {
	t.Helper()
	for _, name := range []string{"chromium", "chromium-browser", "google-chrome"} {
		if p, err := exec.LookPath(name); err == nil {
			return p
		}
	}
	if os.Getenv("CI") == "true" {
		t.Fatal("no browser: install chromium (apt-get install chromium)")
	}
	t.Skip("no browser: install chromium (apt-get install chromium) to run this test")
	return ""
}

// startBrowser starts one browser for a test and its subtests.
func startBrowser(t *testing.T) context.Context {
	t.Helper()
	opts := append(slices.Clone(chromedp.DefaultExecAllocatorOptions[:]),
		chromedp.ExecPath(browserPath(t)), chromedp.NoSandbox, chromedp.DisableGPU, chromedp.UserDataDir(t.TempDir()),
		chromedp.Flag("disable-quic", true), chromedp.Flag("disable-component-update", true), chromedp.WindowSize(1280, 900))
	alloc, stop := chromedp.NewExecAllocator(context.Background(), opts...)
	t.Cleanup(stop)
	browser, stopBrowser := chromedp.NewContext(alloc)
	t.Cleanup(stopBrowser)
	if err := chromedp.Do(browser, chromedp.Navigate("about:blank")); err != nil {
		t.Fatalf("the browser does not start: %v", err)
	}
	return browser
}

// tab opens a page of the gallery in a tab of its own, with a deadline.
func tab(t *testing.T, browser context.Context) context.Context {
	t.Helper()
	ctx, stop := chromedp.NewContext(browser, chromedp.WithNewBrowserContext())
	t.Cleanup(stop)
	if err := chromedp.Do(ctx, chromedp.Navigate("about:blank")); err != nil {
		t.Fatal(err)
	}
	ctx, cancel := context.WithTimeout(ctx, 2*time.Minute)
	t.Cleanup(cancel)
	return ctx
}

// scheme asks the page to be light or dark, as a reader's system would.
func scheme(value string) chromedp.Action[chromedp.Void] {
	return chromedp.Func(func(ctx context.Context, t *chromedp.Target) error {
		_, err := cdp.Call(ctx, t, emulation.SetEmulatedMedia, emulation.SetEmulatedMediaParams{
			Features: []*emulation.MediaFeature{{Name: "prefers-color-scheme", Value: value}},
		})
		return err
	})
}

// violation is one finding of axe.
type violation struct {
	ID     string `json:"id"`
	Impact string `json:"impact"`
	Help   string `json:"help"`
	Nodes  []struct {
		HTML    string `json:"html"`
		Summary string `json:"failureSummary"`
	} `json:"nodes"`
}

func (v violation) String() string {
	var b strings.Builder
	fmt.Fprintf(&b, "%s (%s): %s, %d times", v.ID, v.Impact, v.Help, len(v.Nodes))
	for i, n := range v.Nodes {
		if i == 3 {
			break
		}
		fmt.Fprintf(&b, "\n    %.200s\n    %.300s", n.HTML, n.Summary)
	}
	return b.String()
}

// TestReach looks at every page in a browser, wide and narrow, light and dark:
// no accessibility rule is broken, nothing is loaded from elsewhere or refused
// by the policy, and nothing but a block row scrolls sideways.
//
// With GALLERY_SHOTS=DIR it also leaves a picture of each in DIR.
func TestReach(t *testing.T) {
	browser := startBrowser(t)
	server := httptest.NewServer(Handler())
	t.Cleanup(server.Close)
	for _, s := range Sheets() {
		if s.Name == "job" {
			continue // a part of a page
		}
		t.Run(s.Name, func(t *testing.T) { reach(t, tab(t, browser), server.URL, s.Name) })
	}
}

func reach(t *testing.T, ctx context.Context, base, name string) {
	quiet, stopConsole := context.WithCancel(ctx)
	messages := chromedp.Console(quiet)
	if err := chromedp.Do(ctx, chromedp.Navigate(base+"/"+name)); err != nil {
		t.Fatal(err)
	}
	if _, err := chromedp.Run(ctx, chromedp.Evaluate[int](axe+";0")); err != nil {
		t.Fatal(err)
	}
	for _, width := range []int64{1280, 390} {
		for _, theme := range []string{"light", "dark"} {
			if err := chromedp.Do(ctx, chromedp.EmulateViewport(width, 1400), scheme(theme)); err != nil {
				t.Fatal(err)
			}
			shoot(t, ctx, fmt.Sprintf("%s-%d-%s", name, width, theme))
			options := axeOptions(name, width, theme)
			if options == "" {
				continue
			}
			found, err := chromedp.Run(ctx, chromedp.Evaluate[[]violation](
				"axe.run(document, "+options+").then(r => r.violations)", chromedp.EvalAwaitPromise))
			if err != nil {
				t.Fatalf("%d px, %s: %v", width, theme, err)
			}
			for _, v := range found {
				t.Errorf("%d px, %s: %s", width, theme, v)
			}
		}
	}
	for _, width := range []int64{320, 390, 768, 1020, 1280} {
		noSideways(t, ctx, width)
	}
	stopConsole()
	for m, err := range messages {
		if err != nil {
			break
		}
		if m.Type == "error" || m.IsException() {
			t.Errorf("the console says %s", m)
		}
	}
}

// axeOptions says which rules to try. Dark differs from light in contrast
// alone. The overfull pages differ from the usual ones in quantity alone, and
// take long: one pass of theirs is enough.
func axeOptions(name string, width int64, theme string) string {
	switch {
	case strings.HasSuffix(name, "-full") && (width != 1280 || theme != "light"):
		return ""
	case strings.HasSuffix(name, "-full"):
		return "{resultTypes: ['violations'], rules: {'color-contrast': {enabled: false}}}"
	case theme == "dark":
		return "{runOnly: ['color-contrast']}"
	}
	return "{resultTypes: ['violations']}"
}

// noSideways checks that the page is no wider than the screen.
func noSideways(t *testing.T, ctx context.Context, width int64) {
	t.Helper()
	if err := chromedp.Do(ctx, chromedp.EmulateViewport(width, 900)); err != nil {
		t.Fatal(err)
	}
	got, err := chromedp.Run(ctx, chromedp.Evaluate[int64]("document.documentElement.scrollWidth"))
	if err != nil {
		t.Fatal(err)
	}
	if got > width {
		who, _ := chromedp.Run(ctx, chromedp.Evaluate[string](`[...document.querySelectorAll("main *")].filter(e => !e.closest(".wide") || e.matches(".wide"))
			.filter(e => e.getBoundingClientRect().right > innerWidth + 1).slice(0, 3).map(e => e.outerHTML.slice(0, 120)).join("\n")`))
		t.Errorf("at %d px the page is %d px wide:\n%s", width, got, who)
	}
}

// shoot leaves a picture where the environment asks for it.
func shoot(t *testing.T, ctx context.Context, name string) {
	t.Helper()
	dir := os.Getenv("GALLERY_SHOTS")
	if dir == "" {
		return
	}
	png, err := chromedp.Run(ctx, chromedp.CaptureScreenshot())
	if err == nil {
		err = os.WriteFile(filepath.Join(dir, name+".png"), png, 0o644)
	}
	if err != nil {
		t.Errorf("no picture of %s: %v", name, err)
	}
}
