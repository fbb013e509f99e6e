// Package migrations holds the database's schema as numbered steps, embedded
// into the program. schema.sql beside them is the whole schema in one readable
// file, kept true by a test; it is not run.
package migrations

import "embed"

// FS holds the steps, NNNN_name.sql.
//
//go:embed [0-9]*.sql
var FS embed.FS

// Schema is the whole schema as one file.
//
//go:embed schema.sql
var Schema string
