package gallery

import (
	"bytes"
	"compress/gzip"
	"io"
	"testing"

	"cadencewright/web/page"
	"cadencewright/web/view"
)

func pageWeek(w io.Writer, v view.Week) error { return page.Week(w, v) }

// gzipped is how long a page is as it goes over the line.
func gzipped(t *testing.T, b []byte) int {
	t.Helper()
	var buf bytes.Buffer
	z := gzip.NewWriter(&buf)
	if _, err := z.Write(b); err != nil {
		t.Fatal(err)
	}
	if err := z.Close(); err != nil {
		t.Fatal(err)
	}
	t.Logf("%d bytes, %d compressed", len(b), buf.Len())
	return buf.Len()
}

// BenchmarkOverfullWeek is the server's share of the largest page. It checks
// that the page is whole before it is timed.
func BenchmarkOverfullWeek(b *testing.B) {
	v := fullWeek()
	var buf bytes.Buffer
	if err := page.Week(&buf, v); err != nil || !bytes.Contains(buf.Bytes(), []byte("</html>")) {
		b.Fatalf("no whole page: %v", err)
	}
	for b.Loop() {
		buf.Reset()
		if err := page.Week(&buf, v); err != nil {
			b.Fatal(err)
		}
	}
}
