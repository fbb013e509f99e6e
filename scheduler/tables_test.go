package scheduler

import (
	"reflect"
	"strings"
	"testing"
)

// allTables are the tables of both formats with the struct each describes.
func allTables() map[*table]any {
	return map[*table]any{
		&campaignFile: new(Campaign), &telescopeTable: new(Telescope), &receiverTable: new(Receiver),
		&sourceTable: new(Source),
		&binaryTable: new(Binary), &cadenceTable: new(CadenceTarget), &phaseTable: new(PhaseGoal),
		&windowTable:  new(PhaseWindow),
		&overlapTable: new(OverlapGoal), &pairTable: new(BandPairGoal), &blockTable: new(Block),
		&historyTable: new(HistoryScan), &pinTable: new(Pin),
		&planFile: new(Plan), &scanTable: new(Scan), &earningTable: new(Earning), &unmetTable: new(Unmet),
		&reasonTable:      new(Reason),
		&certificateTable: new(Certificate),
	}
}

// tableFields are the fields of a table, those of an object inside it that has
// no struct of its own included.
func tableFields(t *table) []field {
	var all []field
	for _, f := range t.fields {
		if n, ok := f.kind.(nested); ok && n.table == &campaignHead {
			all = append(all, n.table.fields...)
		} else {
			all = append(all, f)
		}
	}
	return all
}

// Every field of every struct is one key of its table, and no two keys share a
// field: nothing can be lost between file and struct.
func TestTablesCoverEveryField(t *testing.T) {
	for table, obj := range allTables() {
		keys := map[uintptr]string{}
		for _, f := range tableFields(table) {
			if f.at == nil {
				continue // the format's name
			}
			p := reflect.ValueOf(f.at(obj)).Pointer()
			if other, twice := keys[p]; twice {
				t.Errorf("%s: keys %s and %s share one field", table.what, other, f.key)
			}
			keys[p] = f.key
		}
		eachLeaf(reflect.ValueOf(obj).Elem(), func(name string, v reflect.Value) {
			if keys[v.Addr().Pointer()] == "" {
				t.Errorf("%s: the field %s has no key", table.what, name)
			}
			delete(keys, v.Addr().Pointer())
		})
		for _, k := range keys {
			t.Errorf("%s: the key %s leads to no field of the struct", table.what, k)
		}
	}
}

// eachLeaf calls f for every field of a struct, embedded ones opened.
func eachLeaf(v reflect.Value, f func(name string, v reflect.Value)) {
	for i := range v.NumField() {
		if field := v.Type().Field(i); field.Anonymous {
			eachLeaf(v.Field(i), f)
		} else {
			f(field.Name, v.Field(i))
		}
	}
}

// Keys are named as the planning model names them, are described, and a
// unit in the name is the unit of the description.
func TestTablesAreDescribed(t *testing.T) {
	units := map[string]string{"_deg": "degrees", "_s": "s", "_mhz": "MHz", "_k": "K", "_d": "d", "_min": "minutes",
		"_us": "us", "_h": "hours",
		"_mjy": "mJy", "_mas_yr": "mas/yr", "_deg_s": "degrees/s", "_mjd": "MJD", "_ls": "light-seconds",
		"_msun": "solar masses"}
	for table := range allTables() {
		if len(table.fields) > 64 {
			t.Errorf("%s has %d keys; the reader counts those it has seen in 64 bits", table.what, len(table.fields))
		}
		for _, f := range tableFields(table) {
			if f.doc == "" {
				t.Errorf("%s: %s is not described", table.what, f.key)
			}
			if strings.ToLower(f.key) != f.key {
				t.Errorf("%s: key %s is not in lower case", table.what, f.key)
			}
			for suffix, unit := range units {
				if n, ok := f.kind.(number); ok && strings.HasSuffix(f.key, suffix) &&
					!strings.Contains(f.doc+" "+n.unit, unit) {
					if longer(f.key, suffix, units) {
						continue
					}
					t.Errorf("%s: %s is described %q, in which %s does not appear", table.what, f.key, f.doc, unit)
				}
			}
		}
	}
}

// longer reports whether a longer suffix than this one ends the key.
func longer(key, suffix string, units map[string]string) bool {
	for s := range units {
		if len(s) > len(suffix) && strings.HasSuffix(key, s) {
			return true
		}
	}
	return false
}

// A default lies in its own range, or is the 0 that stands for absent.
func TestDefaultsAreAllowed(t *testing.T) {
	for table := range allTables() {
		for _, f := range tableFields(table) {
			switch k := f.kind.(type) {
			case number:
				if k.standard != 0 && !k.ok(k.standard) {
					t.Errorf("%s: default %v of %s is not %s", table.what, k.standard, f.key, k.allowed())
				}
			case integer:
				var c checker
				k.check(&c, &k.standard)
				if k.standard != 0 && c.err() != nil {
					t.Errorf("%s: default %d of %s is not %s", table.what, k.standard, f.key, k.allowed())
				}
			}
		}
	}
}
