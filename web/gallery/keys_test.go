package gallery

import (
	"context"
	"net/http"
	"net/http/httptest"
	"strings"
	"sync/atomic"
	"testing"

	"github.com/chromedp/cdproto/cdp"
	"github.com/chromedp/cdproto/emulation"
	"github.com/chromedp/chromedp"
	"github.com/chromedp/chromedp/kb"

	"cadencewright/web/page"
)

// focused is what a screen reader would say of the element in focus, as far as
// tests need it: its title or its id.
const focused = `(document.activeElement.querySelector("title")?.textContent ?? document.activeElement.id) || document.activeElement.tagName`

func ask(t *testing.T, ctx context.Context, js string) string {
	t.Helper()
	got, err := chromedp.Run(ctx, chromedp.Evaluate[string](js))
	if err != nil {
		t.Fatalf("%s: %v", js, err)
	}
	return got
}

func do(t *testing.T, ctx context.Context, steps ...chromedp.Action[chromedp.Void]) {
	t.Helper()
	if err := chromedp.Do(ctx, steps...); err != nil {
		t.Fatal(err)
	}
}

// TestKeysOfTheWeek walks through the scans with the keyboard alone.
func TestKeysOfTheWeek(t *testing.T) {
	browser := startBrowser(t)
	server := httptest.NewServer(Handler())
	t.Cleanup(server.Close)
	ctx := tab(t, browser)
	do(t, ctx, chromedp.Navigate(server.URL+"/week"), chromedp.KeyEvent(kb.ArrowRight))
	for _, c := range []struct{ key, want string }{
		{"", "SIM J0412+1833, L, 20:05"}, // the first scan of the first block
		{kb.ArrowRight, "SIM J0029-0554, S, 20:55"},
		{kb.ArrowRight, "SIM J0613-3014, UWB, 21:45"},
		{kb.ArrowLeft, "SIM J0029-0554, S, 20:55"},
		{kb.ArrowDown, "SIM J1849+0937, L, 04:05"}, // the nearest by place in the block below
		{kb.ArrowUp, "SIM J0029-0554, S, 20:55"},
	} {
		if c.key != "" {
			do(t, ctx, chromedp.KeyEvent(c.key))
		}
		if got := ask(t, ctx, focused); !strings.HasPrefix(got, c.want) {
			t.Errorf("after key %q the focus is on %q, want %q", c.key, got, c.want)
		}
	}
	do(t, ctx, chromedp.KeyEvent("?"))
	if got := ask(t, ctx, `String(document.getElementById("keys").open)`); got != "true" {
		t.Error("? does not show the keys")
	}
	do(t, ctx, chromedp.KeyEvent(kb.Escape), chromedp.KeyEvent("/"))
	if got := ask(t, ctx, focused); got != "q" {
		t.Errorf("after / the focus is on %q, want the search", got)
	}
	do(t, ctx, chromedp.KeyEvent("?"))
	if got := ask(t, ctx, `document.getElementById("q").value + document.getElementById("keys").open`); !strings.HasSuffix(got, "?false") {
		t.Errorf("a ? typed into the search opened the help or was lost: %q", got)
	}
}

// TestRowsScrollByKeys: while a row itself is in focus, left and right scroll it
// as the browser does and leave the focus where it is.
func TestRowsScrollByKeys(t *testing.T) {
	browser := startBrowser(t)
	server := httptest.NewServer(Handler())
	t.Cleanup(server.Close)
	ctx := tab(t, browser)
	do(t, ctx, chromedp.EmulateViewport(480, 900), chromedp.Navigate(server.URL+"/week"))
	const row = `document.querySelector(".block .wide")`
	if got := ask(t, ctx, row+`.focus(); String(`+row+`.scrollWidth > `+row+`.clientWidth + 100 && document.activeElement === `+row+`)`); got != "true" {
		t.Fatal("the first row has nothing to scroll, or cannot be in focus")
	}
	do(t, ctx, chromedp.KeyEvent(kb.ArrowRight), chromedp.Poll[chromedp.Void](row+`.scrollLeft > 0`))
	if got := ask(t, ctx, `String(document.activeElement === `+row+`)`); got != "true" {
		t.Error("the right arrow took the focus away from the row")
	}
	do(t, ctx, chromedp.KeyEvent(kb.ArrowLeft), chromedp.Poll[chromedp.Void](row+`.scrollLeft === 0`))
	// With a scan in focus, arrows go on walking.
	ask(t, ctx, row+`.querySelector("a.scan").focus(); "focused"`)
	do(t, ctx, chromedp.KeyEvent(kb.ArrowRight))
	if got := ask(t, ctx, focused); !strings.HasPrefix(got, "SIM J0029-0554, S, 20:55") {
		t.Errorf("from the first scan the focus went to %q", got)
	}
}

// TestPaperSaysWhatItIs: on paper a run sheet says of which plan and revision it
// is and when it was made, though the navigation is left out.
func TestPaperSaysWhatItIs(t *testing.T) {
	browser := startBrowser(t)
	server := httptest.NewServer(Handler())
	t.Cleanup(server.Close)
	ctx := tab(t, browser)
	do(t, ctx, media("print"), chromedp.Navigate(server.URL+"/run-sheet"))
	text := ask(t, ctx, `document.body.innerText.replace(/\s+/g, " ")`) // what is shown, not what is hidden
	for _, want := range []string{"week 2027-W03, revision 2, issued Tue 19 Jan 13:05 UTC by Imre Oduya", "sheet made Tue 19 Jan 14:35 UTC", "page made Tue 19 Jan 14:35"} {
		if !strings.Contains(text, want) {
			t.Errorf("the sheet on paper does not say %q", want)
		}
	}
	if strings.Contains(text, "As CSV") || strings.Contains(text, "Sign out") {
		t.Error("the navigation stands on paper")
	}
}

// media makes the page lay itself out as on a screen or on paper.
func media(kind string) chromedp.Action[chromedp.Void] {
	return chromedp.Func(func(ctx context.Context, t *chromedp.Target) error {
		_, err := cdp.Call(ctx, t, emulation.SetEmulatedMedia, emulation.SetEmulatedMediaParams{Media: kind})
		return err
	})
}

// TestThemeStays changes the theme by its switch and loads another page.
func TestThemeStays(t *testing.T) {
	browser := startBrowser(t)
	server := httptest.NewServer(Handler())
	t.Cleanup(server.Close)
	ctx := tab(t, browser)
	do(t, ctx, chromedp.Navigate(server.URL+"/sources"))
	for _, want := range []string{"light", "dark"} {
		do(t, ctx, chromedp.Click(chromedp.CSS("#theme")))
		if got := ask(t, ctx, `document.documentElement.dataset.theme`); got != want {
			t.Errorf("theme %q, want %q", got, want)
		}
	}
	do(t, ctx, chromedp.Navigate(server.URL+"/telescopes"))
	if got := ask(t, ctx, `document.documentElement.dataset.theme`); got != "dark" {
		t.Errorf("on the next page the theme is %q, want dark", got)
	}
	do(t, ctx, chromedp.Click(chromedp.CSS("#theme")))
	if got := ask(t, ctx, `document.documentElement.dataset.theme ?? "as the system"`); got != "as the system" {
		t.Errorf("theme %q, want as the system", got)
	}
}

// TestProgressMoves lets a planning job run: the page takes in its progress by
// itself, keeps what it shows when an answer fails, keeps the focus, and loads
// anew at the end.
func TestProgressMoves(t *testing.T) {
	browser := startBrowser(t)
	var asked, loaded atomic.Int64
	again := make(chan struct{}) // closed when the page is loaded anew
	mux := http.NewServeMux()
	mux.Handle("/static/", Handler())
	mux.HandleFunc("GET /weeks/"+week, func(w http.ResponseWriter, _ *http.Request) {
		v := planningWeek()
		if loaded.Add(1) == 2 {
			v.Job = nil
			close(again)
		}
		w.Header().Set("Content-Security-Policy", CSP)
		page.Week(w, v)
	})
	mux.HandleFunc("GET /weeks/"+week+"/job", func(w http.ResponseWriter, r *http.Request) {
		n := asked.Add(1)
		if r.Header.Get("HX-Request") != "true" {
			t.Error("the request does not say that it wants a part of the page")
		}
		switch {
		case n == 2:
			http.Error(w, "the database is away", http.StatusServiceUnavailable)
			return
		case n > 3:
			w.Header().Set("HX-Refresh", "true")
		}
		j := *planningWeek().Job
		j.Done = 0.4 + float64(n)/10
		page.JobFragment(w, &j)
	})
	server := httptest.NewServer(mux)
	t.Cleanup(server.Close)
	ctx := tab(t, browser)
	do(t, ctx, chromedp.Navigate(server.URL+"/weeks/"+week))
	do(t, ctx, chromedp.Poll[chromedp.Void](`document.querySelector("#job progress")?.value >= 50`))
	ask(t, ctx, `document.querySelector("#job button").focus(); "focused"`)
	do(t, ctx, chromedp.Poll[chromedp.Void](`document.querySelector("#job progress")?.value >= 70`))
	if got := ask(t, ctx, `document.activeElement.textContent`); got != "Stop, keep the best" {
		t.Errorf("the focus went to %q while the progress moved", got)
	}
	select {
	case <-again:
	case <-ctx.Done():
		t.Errorf("the page was not loaded anew at the end of the job (%d questions)", asked.Load())
	}
}
