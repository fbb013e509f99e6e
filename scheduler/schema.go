package scheduler

import "encoding/json"

// CampaignSchema is a JSON Schema (2020-12) of the campaign file. It says all
// that can be said of one value; references, names used twice and blocks that
// overlap are for ReadCampaign.
func CampaignSchema() []byte {
	return schemaOf(&campaignFile, "Campaign file",
		"What an observing campaign has and wants. Angles are degrees, instants UTC, longitudes east-positive.")
}

// PlanSchema is a JSON Schema (2020-12) of the plan file.
func PlanSchema() []byte {
	return schemaOf(&planFile, "Plan file",
		"Scans for the blocks of one horizon, what they earn, what stays unmet, and a certificate of the bound.")
}

// schemaOf writes a whole schema document. Its bytes are always the same:
// encoding/json writes maps in the order of their keys.
func schemaOf(t *table, title, description string) []byte {
	s := t.schema()
	s["$schema"] = "https://json-schema.org/draft/2020-12/schema"
	s["title"] = title
	s["description"] = description
	b, err := json.MarshalIndent(s, "", "  ")
	if err != nil {
		panic("scheduler: a schema that cannot be written: " + err.Error()) // tables are constants
	}
	return append(b, '\n')
}

// schema describes the objects of a table. What belongs to one value of the
// selector alone is a condition on it.
func (t *table) schema() map[string]any {
	properties := map[string]any{}
	required := []string{}
	for i := range t.fields {
		f := &t.fields[i]
		p := f.kind.schema()
		if f.doc != "" {
			p["description"] = f.doc
		}
		properties[f.key] = p
		if f.need && f.only == "" {
			required = append(required, f.key)
		}
	}
	s := map[string]any{"type": "object", "properties": properties, "required": required, "additionalProperties": false}
	if t.selector != "" {
		s["allOf"] = t.conditions()
	}
	return s
}

// conditions are one if-then for each value of the selector.
func (t *table) conditions() []any {
	var all []any
	for _, choice := range t.choices {
		required := []string{}
		foreign := map[string]any{}
		for i := range t.fields {
			switch f := &t.fields[i]; {
			case !f.belongs(choice):
				foreign[f.key] = false
			case f.need && f.only != "":
				required = append(required, f.key)
			}
		}
		all = append(all, map[string]any{
			"if": map[string]any{"properties": map[string]any{t.selector: map[string]any{"const": choice}},
				"required": []string{t.selector}},
			"then": map[string]any{"required": required, "properties": foreign},
		})
	}
	return all
}
