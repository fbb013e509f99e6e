// Package testdata finds and reads the reference tables beside it, for tests
// of other packages. It holds no product code and nothing of the program may
// depend on it. Tables are read by column name: one with other rows, or with
// more columns, can be put in the place of any of them.
package testdata

import (
	"encoding/csv"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"strconv"
	"testing"
	"time"
)

// Path is a file in this folder, found by walking up from where the test runs
// to the module's root.
func Path(elem ...string) string {
	dir, err := os.Getwd()
	if err != nil {
		panic(fmt.Sprintf("testdata: no working directory: %v", err))
	}
	for {
		if _, err := os.Stat(filepath.Join(dir, "go.mod")); err == nil {
			return filepath.Join(append([]string{dir, "testdata"}, elem...)...)
		}
		up := filepath.Dir(dir)
		if up == dir {
			panic("testdata: no go.mod in the working directory or above")
		}
		dir = up
	}
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
// so when the test is done (shown by go test -v).
type Largest struct {
	what, unit string          // the unit with a space before it
	rows       map[string]bool // that were checked
	err        float64         // the largest
	worst      float64         // the error that is the largest part of what is allowed
	allowed    float64         // there
	row        string          // there
}

// Watch starts keeping the largest error of a quantity.
func Watch(t testing.TB, what, unit string) *Largest {
	if unit != "" {
		unit = " " + unit
	}
	l := &Largest{what: what, unit: unit, rows: map[string]bool{}, allowed: 1}
	t.Cleanup(func() {
		t.Helper()
		if len(l.rows) == 0 {
			t.Logf("%s: rows 0", l.what)
			return
		}
		t.Logf("%s: rows %d, largest error %.3g%s (allowed %.3g at %s)", l.what, len(l.rows), l.worst, l.unit, l.allowed, l.row)
		if l.err > l.worst {
			t.Logf("%s: %.3g%s where more is allowed", l.what, l.err, l.unit)
		}
	})
	return l
}

// Check compares one value with what is wanted.
func (l *Largest) Check(r Row, got, want, allowed float64) {
	r.t.Helper()
	l.Error(r, math.Abs(got-want), allowed)
}

// Error takes the size of one error.
func (l *Largest) Error(r Row, size, allowed float64) {
	r.t.Helper()
	l.rows[r.where] = true
	if !(size <= allowed) { // also catches NaN
		r.t.Errorf("%s: %s is off by %.6g%s, %.6g allowed", r.where, l.what, size, l.unit, allowed)
	}
	l.err = max(l.err, size)
	if l.row == "" || size/allowed > l.worst/l.allowed {
		l.worst, l.allowed, l.row = size, allowed, r.where
	}
}
