package store

import (
	"context"
	"go/ast"
	"go/parser"
	"go/token"
	"os"
	"strconv"
	"strings"
	"testing"

	"github.com/jackc/pgx/v5"
)

// queries finds every SQL constant of the package by its name, q…, in the
// source itself, so that none can be forgotten.
func queries(t *testing.T) map[string]string {
	t.Helper()
	entries, err := os.ReadDir(".")
	if err != nil {
		t.Fatal(err)
	}
	parts := map[string]ast.Expr{}
	for _, e := range entries {
		if !strings.HasSuffix(e.Name(), ".go") || strings.HasSuffix(e.Name(), "_test.go") {
			continue
		}
		f, err := parser.ParseFile(token.NewFileSet(), e.Name(), nil, 0)
		if err != nil {
			t.Fatal(err)
		}
		for _, d := range f.Decls {
			g, ok := d.(*ast.GenDecl)
			if !ok || g.Tok != token.CONST {
				continue
			}
			for _, s := range g.Specs {
				v := s.(*ast.ValueSpec)
				for i, n := range v.Names {
					if i < len(v.Values) {
						parts[n.Name] = v.Values[i]
					}
				}
			}
		}
	}
	out := map[string]string{}
	for name, expr := range parts {
		if len(name) > 1 && name[0] == 'q' && name[1] >= 'A' && name[1] <= 'Z' {
			out[name] = text(t, parts, expr)
		}
	}
	return out
}

func text(t *testing.T, parts map[string]ast.Expr, e ast.Expr) string {
	switch e := e.(type) {
	case *ast.BasicLit:
		s, err := strconv.Unquote(e.Value)
		if err != nil {
			t.Fatal(err)
		}
		return s
	case *ast.BinaryExpr:
		return text(t, parts, e.X) + text(t, parts, e.Y)
	case *ast.Ident:
		return text(t, parts, parts[e.Name])
	}
	t.Fatalf("a constant of another form: %T", e)
	return ""
}

// Every query is one that the schema understands: a wrong column, table or
// type fails here and not in the night.
func TestEveryQueryPrepares(t *testing.T) {
	dsn := testDSN(t)
	ctx := context.Background()
	conn, err := pgx.Connect(ctx, dsn)
	if err != nil {
		t.Fatal(err)
	}
	defer conn.Close(ctx)
	all := queries(t)
	if len(all) < 40 {
		t.Fatalf("only %d queries found", len(all))
	}
	for name, q := range all {
		if strings.Contains(q, "@") {
			q, _, _ = (pgx.NamedArgs{}).RewriteQuery(ctx, conn, q, nil)
		}
		if _, err := conn.Prepare(ctx, name, q); err != nil {
			t.Errorf("%s: %v", name, err)
		}
	}
}

const catalog = `
select 'column', table_name || '.' || column_name, data_type || ' ' || is_nullable || ' ' || coalesce(column_default, '') from information_schema.columns where table_schema = 'public'
union all select 'constraint', conrelid::regclass || '.' || conname, pg_get_constraintdef(oid) from pg_constraint where connamespace = 'public'::regnamespace and conrelid <> 0
union all select 'index', indexname, indexdef from pg_indexes where schemaname = 'public'
order by 1, 2`

func fingerprint(t *testing.T, dsn string) map[string]string {
	t.Helper()
	ctx := context.Background()
	conn, err := pgx.Connect(ctx, dsn)
	if err != nil {
		t.Fatal(err)
	}
	defer conn.Close(ctx)
	rows, err := conn.Query(ctx, catalog)
	if err != nil {
		t.Fatal(err)
	}
	out := map[string]string{}
	var kind, name, def string
	if _, err := pgx.ForEachRow(rows, []any{&kind, &name, &def}, func() error {
		if !strings.Contains(name, "goose") {
			out[kind+" "+name] = def
		}
		return nil
	}); err != nil {
		t.Fatal(err)
	}
	return out
}

// schema.sql makes the database that the migrations make.
func TestSchemaFileIsTrue(t *testing.T) {
	migrated := fingerprint(t, testDSN(t))
	bySchema := fingerprint(t, schemaDSN(t))
	if len(migrated) < 100 {
		t.Fatalf("only %d things in the catalogue", len(migrated))
	}
	for name, def := range migrated {
		if bySchema[name] != def {
			t.Errorf("%s: migrations make %q, schema.sql makes %q", name, def, bySchema[name])
		}
	}
	for name := range bySchema {
		if _, ok := migrated[name]; !ok {
			t.Errorf("%s is in schema.sql only", name)
		}
	}
}

var testDSN, schemaDSN func(t testing.TB) string

// SetDSN gives the tests inside the package their databases; storetest cannot
// be imported here, since it imports this package.
func SetDSN(migrated, bySchema func(t testing.TB) string) { testDSN, schemaDSN = migrated, bySchema }
