package scheduler

import (
	"bytes"
	"encoding/json"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"github.com/santhosh-tekuri/jsonschema/v6"
	"pgregory.net/rapid"
)

// compiled is a schema ready to validate.
func compiled(t testing.TB, schema []byte) *jsonschema.Schema {
	t.Helper()
	doc, err := jsonschema.UnmarshalJSON(bytes.NewReader(schema))
	if err != nil {
		t.Fatal(err)
	}
	c := jsonschema.NewCompiler()
	c.DefaultDraft(jsonschema.Draft2020)
	c.AssertFormat()
	if err := c.AddResource("file.json", doc); err != nil {
		t.Fatal(err)
	}
	s, err := c.Compile("file.json")
	if err != nil {
		t.Fatal(err)
	}
	return s
}

// valid reports whether a schema accepts a document.
func valid(t testing.TB, s *jsonschema.Schema, data []byte) error {
	t.Helper()
	doc, err := jsonschema.UnmarshalJSON(bytes.NewReader(data))
	if err != nil {
		t.Fatal(err)
	}
	return s.Validate(doc)
}

// The schemas are JSON Schema 2020-12, and always the same bytes.
func TestSchemasAreSchemas(t *testing.T) {
	draft, err := jsonschema.NewCompiler().Compile("https://json-schema.org/draft/2020-12/schema")
	if err != nil {
		t.Fatal(err)
	}
	for name, make := range map[string]func() []byte{"campaign": CampaignSchema, "plan": PlanSchema} {
		data := make()
		if err := valid(t, draft, data); err != nil {
			t.Errorf("%s: not a schema: %v", name, err)
		}
		if !bytes.Equal(data, make()) {
			t.Errorf("%s: other bytes the second time", name)
		}
		if !bytes.Contains(data, []byte("https://json-schema.org/draft/2020-12/schema")) {
			t.Errorf("%s: does not name its draft", name)
		}
	}
}

// Every key of every table is in the schema, with its description.
func TestSchemasHaveEveryField(t *testing.T) {
	for _, x := range []struct {
		schema []byte
		root   *table
	}{{CampaignSchema(), &campaignFile}, {PlanSchema(), &planFile}} {
		var root map[string]any
		if err := json.Unmarshal(x.schema, &root); err != nil {
			t.Fatal(err)
		}
		sameKeys(t, "", x.root, root)
	}
}

// sameKeys compares a table with the part of a schema that describes it.
func sameKeys(t *testing.T, at string, of *table, schema map[string]any) {
	properties, _ := schema["properties"].(map[string]any)
	var want, got []string
	for _, f := range of.fields {
		want = append(want, f.key)
	}
	for k := range properties {
		got = append(got, k)
	}
	slices.Sort(want)
	slices.Sort(got)
	if !slices.Equal(want, got) {
		t.Errorf("%s: schema has %v, table has %v", at, got, want)
		return
	}
	if schema["additionalProperties"] != false {
		t.Errorf("%s: the schema allows unknown keys", at)
	}
	for _, f := range of.fields {
		p := properties[f.key].(map[string]any)
		if f.doc != "" && p["description"] != f.doc {
			t.Errorf("%s/%s: description %v", at, f.key, p["description"])
		}
		if items, ok := p["items"].(map[string]any); ok {
			p = items
		}
		if inner := innerTable(f.kind); inner != nil && inner != &reasonTable {
			sameKeys(t, at+"/"+f.key, inner, p)
		}
	}
}

// Every kept campaign is valid against the schema, and so is what the writer
// makes of drawn ones.
func TestSchemasAcceptWhatTheReaderAccepts(t *testing.T) {
	schema := compiled(t, CampaignSchema())
	files, _ := filepath.Glob(filepath.Join(campaignFiles, "*.json"))
	if len(files) < 7 {
		t.Fatalf("%d campaign files", len(files))
	}
	for _, f := range files {
		if err := valid(t, schema, readTestFile(t, filepath.Base(f))); err != nil {
			t.Errorf("%s: %v", f, err)
		}
	}
	planSchema := compiled(t, PlanSchema())
	if err := valid(t, planSchema, []byte(planText)); err != nil {
		t.Errorf("plan: %v", err)
	}
	rapid.Check(t, func(t *rapid.T) {
		data, err := WriteCampaign(anyCampaign(t))
		if err != nil {
			t.Fatal(err)
		}
		doc, _ := jsonschema.UnmarshalJSON(bytes.NewReader(data))
		if err := schema.Validate(doc); err != nil {
			t.Fatalf("%v\n%s", err, data)
		}
		if data, err = WritePlan(anyPlan(t)); err != nil {
			t.Fatal(err)
		}
		doc, _ = jsonschema.UnmarshalJSON(bytes.NewReader(data))
		if err := planSchema.Validate(doc); err != nil {
			t.Fatalf("%v\n%s", err, data)
		}
	})
}

// betweenValues matches the messages of rules that a schema cannot say: those
// between values, and on time zones.
var betweenValues = []string{"there is no", "has no", "not one of", "must lie", "does not lie inside", "stands at",
	"stands in the list", "must ascend", " after ", "above elevation_min",
	"half of every_d", "multiple of the grid", "less than period_s", "the first must be below", "greater than from",
	"number of telescopes", "overlaps",
	"at most 14 days", "at most 5 years", "inside the block", "time zone", "# or @", "can be at most",
	"control characters", "exactly two"}

// Broken files that the reader refuses for one value alone fail the schema.
func TestSchemaRefusesBrokenFiles(t *testing.T) {
	schema := compiled(t, CampaignSchema())
	document := readTestFile(t, "every-field.json")
	refused := 0
	for _, group := range [][]broken{brokenHead, brokenTelescopes, brokenSources, brokenGoals, brokenTimes} {
		for _, b := range group {
			if slices.ContainsFunc(betweenValues, func(s string) bool { return strings.Contains(b.message, s) }) {
				continue
			}
			if valid(t, schema, edited(t, document, b.at, b.value)) == nil {
				t.Errorf("the schema accepts %s = %v (%s)", b.at, b.value, b.message)
			}
			refused++
		}
	}
	if refused < 75 {
		t.Errorf("only %d broken files were tried", refused)
	}
}
