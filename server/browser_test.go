package server

import (
	"context"
	"os"
	"os/exec"
	"strings"
	"testing"
	"time"

	"github.com/chromedp/chromedp"

	"cadencewright/server/auth"
)

// browser is a headless Chromium for one test. Without one on the machine the
// test is skipped, or fails where CI=true.
func browser(t *testing.T) context.Context {
	t.Helper()
	if _, err := exec.LookPath("chromium"); err != nil {
		if os.Getenv("CI") == "true" {
			t.Fatal("no chromium: apt-get install chromium")
		}
		t.Skip("no chromium: apt-get install chromium")
	}
	opts := append(chromedp.DefaultExecAllocatorOptions[:], chromedp.NoSandbox, chromedp.DisableGPU, chromedp.WindowSize(1280, 900),
		chromedp.UserDataDir(t.TempDir()), chromedp.Flag("disable-quic", true), chromedp.Flag("disable-component-update", true))
	ctx, cancel := chromedp.NewExecAllocator(context.Background(), opts...)
	t.Cleanup(cancel)
	ctx, cancel = chromedp.NewContext(ctx)
	t.Cleanup(cancel)
	ctx, cancel = context.WithTimeout(ctx, 4*time.Minute)
	t.Cleanup(cancel)
	return ctx
}

// do runs steps in the browser; where one fails, what the page shows is told.
func do(t *testing.T, ctx context.Context, what string, steps ...chromedp.Action[chromedp.Void]) {
	t.Helper()
	if err := chromedp.Do(ctx, steps...); err != nil {
		html, _ := chromedp.Run(ctx, chromedp.Text(chromedp.CSS("body")))
		t.Fatalf("%s: %v; the page says:\n%s", what, err, html)
	}
}

// text is what an element of the page says.
func text(t *testing.T, ctx context.Context, selector string) string {
	t.Helper()
	s, err := chromedp.Run(ctx, chromedp.Text(chromedp.CSS(selector)))
	if err != nil {
		t.Fatalf("%s: %v", selector, err)
	}
	return s
}

// A coordinator's week in a real browser: sign in by the one-time link, open
// the week, plan it, issue the plan, open the run sheet and fetch it as CSV.
func TestWeekInABrowser(t *testing.T) {
	w := newWorld(t)
	p, err := w.store.AddPerson(t.Context(), "Ada Example", "coordinator", nil, "", "test")
	if err != nil {
		t.Fatal(err)
	}
	token, err := auth.New(w.store, false).Link(t.Context(), p.ID, time.Hour)
	if err != nil {
		t.Fatal(err)
	}
	ctx := browser(t)
	do(t, ctx, "sign in", chromedp.Navigate(w.http.URL+"/sign-in/"+token), chromedp.Click(chromedp.CSS("main form button")),
		chromedp.WaitVisible(chromedp.CSS("form[action='/sign-out']"))) // else the next navigation aborts the sign-in
	do(t, ctx, "open the week", chromedp.Navigate(w.http.URL+"/"), chromedp.WaitVisible(chromedp.CSS("form[action$='/plan'] button")))
	if got := text(t, ctx, "main h1"); !strings.Contains(got, "2027-W03") {
		t.Errorf("the page is headed %q", got)
	}
	// The page follows the job by itself and shows the draft when it is done.
	do(t, ctx, "plan", chromedp.Click(chromedp.CSS("form[action$='/plan'] button")), chromedp.WaitVisible(chromedp.CSS("form[action$='/issue'] button")))
	if got := text(t, ctx, "main"); !strings.Contains(got, "draft") || !strings.Contains(got, "not issued") {
		t.Error("the page does not say that the plan is a draft")
	}
	do(t, ctx, "issue", chromedp.Click(chromedp.CSS("form[action$='/issue'] button")), chromedp.WaitNotPresent(chromedp.CSS("form[action$='/issue'] button")), chromedp.WaitVisible(chromedp.CSS("a[href*='/nights/']")))
	do(t, ctx, "run sheet", chromedp.Click(chromedp.CSS("a[href*='/nights/']")), chromedp.WaitVisible(chromedp.CSS("#cautions")))
	if got := text(t, ctx, "main"); !strings.Contains(got, "This sheet commands nothing") || !strings.Contains(got, "SIM J") {
		t.Error("the run sheet lacks its cautions or its scans")
	}
	csv, err := chromedp.Run(ctx, chromedp.Evaluate[string](`(async () => {
		const r = await fetch(document.querySelector("a[href$='.csv']").href);
		return r.headers.get("Content-Type") + "\n" + await r.text();
	})()`, chromedp.EvalAwaitPromise))
	if err != nil {
		t.Fatal(err)
	}
	if !strings.HasPrefix(csv, "text/csv") || strings.Count(csv, "\n") < 3 {
		t.Errorf("the CSV is %.300q", csv)
	}
	violations, err := chromedp.Run(ctx, chromedp.Evaluate[int](`document.querySelectorAll("[style], script:not([src])").length`))
	if err != nil {
		t.Fatal(err)
	}
	if violations != 0 {
		t.Errorf("%d inline styles or scripts, which the content policy forbids", violations)
	}
}

// Wrong passwords keep what was typed, and the page leads back to where the
// reader wanted to go.
func TestSignInByPassword(t *testing.T) {
	w := newWorld(t)
	hash, err := auth.HashPassword("a long enough secret")
	if err != nil {
		t.Fatal(err)
	}
	if _, err := w.store.AddPerson(t.Context(), "Bo Example", "reader", nil, hash, "test"); err != nil {
		t.Fatal(err)
	}
	ctx := browser(t)
	try := func(password string) {
		do(t, ctx, "send a password", chromedp.SendKeys(chromedp.CSS("#password"), password), chromedp.Click(chromedp.CSS("main form button")))
	}
	do(t, ctx, "go to a page", chromedp.Navigate(w.http.URL+"/telescopes"), chromedp.WaitVisible(chromedp.CSS("#password")),
		chromedp.SendKeys(chromedp.CSS("#name"), "Bo Example"))
	try("wrong")
	do(t, ctx, "be refused", chromedp.WaitVisible(chromedp.CSS("#sign-in-error")))
	name, err := chromedp.Run(ctx, chromedp.Value(chromedp.CSS("#name")))
	if err != nil || name != "Bo Example" {
		t.Errorf("the name typed is now %q (%v)", name, err)
	}
	try("a long enough secret")
	do(t, ctx, "be let in", chromedp.WaitVisible(chromedp.CSS("a[href^='/telescopes/']")))
	do(t, ctx, "look at a week", chromedp.Navigate(w.http.URL+"/"), chromedp.WaitVisible(chromedp.CSS("main h1")))
	n, err := chromedp.Run(ctx, chromedp.Evaluate[int](`document.querySelectorAll("form[action$='/plan']").length`))
	if err != nil || n != 0 {
		t.Errorf("a reader is offered to plan (%v)", err)
	}
}
