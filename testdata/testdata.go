// Package testdata finds and reads the reference tables beside it, for tests
// of other packages. It holds no product code and nothing of the program may
// depend on it.
package testdata

import (
	"encoding/csv"
	"fmt"
	"os"
	"path/filepath"
	"runtime"
	"strconv"
	"testing"
	"time"
)

// Path is a file in this folder.
func Path(elem ...string) string {
	_, here, _, _ := runtime.Caller(0)
	return filepath.Join(append([]string{filepath.Dir(here)}, elem...)...)
}

// Row is one row of a table, by column name.
type Row struct {
	t     testing.TB
	where string
	cells map[string]string
}

// Table reads reference/NAME.csv; an empty table fails the test.
func Table(t testing.TB, name string) []Row {
	t.Helper()
	file := Path("reference", name+".csv")
	f, err := os.Open(file)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	lines, err := csv.NewReader(f).ReadAll()
	if err != nil {
		t.Fatalf("%s: %v", file, err)
	}
	if len(lines) < 2 {
		t.Fatalf("%s: holds no rows", file)
	}
	rows := make([]Row, 0, len(lines)-1)
	for i, line := range lines[1:] {
		cells := make(map[string]string, len(line))
		for j, c := range line {
			cells[lines[0][j]] = c
		}
		rows = append(rows, Row{t, fmt.Sprintf("%s row %d", name, i+1), cells})
	}
	return rows
}

// String names the row in messages.
func (r Row) String() string { return r.where }

// Has tells whether the column exists and the cell is not empty.
func (r Row) Has(col string) bool { return r.cells[col] != "" }

// Str is a cell.
func (r Row) Str(col string) string {
	r.t.Helper()
	v, ok := r.cells[col]
	if !ok {
		r.t.Fatalf("%s: no column %q", r.where, col)
	}
	return v
}

// Num is a cell as a number; an empty one is 0.
func (r Row) Num(col string) float64 {
	r.t.Helper()
	s := r.cells[col]
	if s == "" {
		return 0
	}
	v, err := strconv.ParseFloat(s, 64)
	if err != nil {
		r.t.Fatalf("%s: %s: %v", r.where, col, err)
	}
	return v
}

// Time is a cell as an RFC 3339 instant.
func (r Row) Time(col string) time.Time {
	r.t.Helper()
	v, err := time.Parse(time.RFC3339Nano, r.Str(col))
	if err != nil {
		r.t.Fatalf("%s: %s: %v", r.where, col, err)
	}
	return v
}

// Largest keeps the largest error of a table against what is allowed, and says
// so when the test is done.
type Largest struct {
	what, unit string
	rows       int
	err        float64
	share      float64 // of the allowed
	row        string
}

// Watch starts keeping the largest error of a quantity.
func Watch(t testing.TB, what, unit string) *Largest {
	l := &Largest{what: what, unit: unit}
	t.Cleanup(func() {
		t.Logf("%s: %d rows, largest error %.3g %s (%.1f %% of what is allowed, %s)", l.what, l.rows, l.err, l.unit, 100*l.share, l.row)
	})
	return l
}

// Check compares one value with what is wanted.
func (l *Largest) Check(r Row, got, want, allowed float64) {
	r.t.Helper()
	l.Error(r, abs(got-want), allowed)
}

// Error takes the size of one error.
func (l *Largest) Error(r Row, size, allowed float64) {
	r.t.Helper()
	l.rows++
	if !(size <= allowed) { // also catches NaN
		r.t.Errorf("%s: %s is off by %.6g %s, %.6g allowed", r.where, l.what, size, l.unit, allowed)
	}
	if size > l.err {
		l.err = size
	}
	if s := size / allowed; s > l.share {
		l.share, l.row = s, r.where
	}
}

func abs(x float64) float64 {
	if x < 0 {
		return -x
	}
	return x
}
