package main

import (
	"encoding/csv"
	"encoding/json"
	"io"
	"strings"
	"text/tabwriter"
)

// The forms in which an answer can be written.
const (
	formTable = "table"
	formCSV   = "csv"
	formJSON  = "json"
)

// rows are a table: a line of column names and lines of cells.
type rows struct {
	columns []string
	lines   [][]string
}

// add appends a line; it has a cell for every column.
func (r *rows) add(cells ...string) { r.lines = append(r.lines, cells) }

// writeAligned writes the table in columns, for people.
func (r *rows) writeAligned(w io.Writer) error {
	tw := tabwriter.NewWriter(w, 0, 8, 2, ' ', 0)
	for _, line := range append([][]string{r.columns}, r.lines...) {
		// A trailing tab would pad the last column.
		if _, err := io.WriteString(tw, strings.Join(line, "\t")+"\n"); err != nil {
			return err
		}
	}
	return tw.Flush()
}

// writeCSV writes the table as comma-separated values (RFC 4180).
func (r *rows) writeCSV(w io.Writer) error {
	c := csv.NewWriter(w)
	if err := c.Write(r.columns); err != nil {
		return err
	}
	return c.WriteAll(r.lines)
}

// plainText keeps a spreadsheet from reading a name as a formula.
func plainText(name string) string {
	if name != "" && strings.ContainsRune("=+-@\t\r", rune(name[0])) {
		return "'" + name
	}
	return name
}

// writeJSON writes a value, indented.
func writeJSON(w io.Writer, v any) error {
	e := json.NewEncoder(w)
	e.SetIndent("", "  ")
	// No page is made of it, and names with & or < stay readable.
	e.SetEscapeHTML(false)
	return e.Encode(v)
}
