package orbit

import (
	"math"
	"testing"
	"time"

	"cadencewright/astro"
	"cadencewright/astro/timescale"
	"cadencewright/testdata"
)

// roemerS is what is asked of the Roemer delay; the tables allow 0.1 s.
const roemerS = 0.03

// starOf is the fixed star of a row.
func starOf(r testdata.Row) astro.Star {
	return astro.Star{RA: astro.FromDeg(r.Num("ra_deg")), Dec: astro.FromDeg(r.Num("dec_deg")), PosEpochMJD: 51544.5}
}

// apartS is a-b in seconds.
func apartS(a, b timescale.MJD) float64 {
	return (float64(a.Day-b.Day) + (a.Frac - b.Frac)) * 86400
}

func TestBarycentricTable(t *testing.T) {
	roemer := testdata.Watch(t, "barycentric: Roemer delay, geocentre", "s")
	bary := testdata.Watch(t, "barycentric: TDB at the barycentre", "s")
	table := testdata.Watch(t, "barycentric: the same by the interpolated table", "s")
	for _, r := range testdata.Table(t, "barycentric") {
		at, star := r.Time("utc"), starOf(r)
		tt, err := timescale.TT(at)
		if err != nil {
			t.Fatal(err)
		}
		roemer.Check(r, RoemerToBarycentreS(star, tt), r.Num("roemer_geo_s"), roemerS)
		got, err := BarycentricTDB(star, at)
		if err != nil {
			t.Fatal(err)
		}
		want := timescale.NewMJD(int(r.Num("bary_tdb_geo_mjd_day")), r.Num("bary_tdb_geo_mjd_fraction"))
		bary.Error(r, math.Abs(apartS(got, want)), roemerS+1e-4)
		earth, err := NewEarth(at.Add(-time.Hour), at.Add(time.Hour))
		if err != nil {
			t.Fatal(err)
		}
		clock := earth.Clock(star)
		quick, err := clock.TDB(at)
		if err != nil {
			t.Fatal(err)
		}
		table.Error(r, math.Abs(apartS(quick, want)), roemerS+1e-4)
	}
}

// binaries are the elements and stars of binaries.csv, by name.
func binaries(t *testing.T) (map[string]Elements, map[string]astro.Star) {
	t.Helper()
	elements, stars := map[string]Elements{}, map[string]astro.Star{}
	for _, r := range testdata.Table(t, "binaries") {
		var e Elements
		var err error
		switch r.Str("model") {
		case "kepler":
			e, err = Kepler(KeplerParams{PbD: r.Num("pb_d"), A1Ls: r.Num("a1_ls"), Ecc: r.Num("ecc"), OmDeg: r.Num("om_deg"),
				T0MJD: r.Num("t0_mjd"), OmdotDegYr: r.Num("omdot_deg_yr"), Pbdot: r.Num("pbdot"),
				M2Msun: r.Num("m2_msun"), Sini: r.Num("sini")})
		case "ell1":
			e, err = ELL1(ELL1Params{PbD: r.Num("pb_d"), A1Ls: r.Num("a1_ls"), TascMJD: r.Num("tasc_mjd"),
				Eps1: r.Num("eps1"), Eps2: r.Num("eps2"), Pbdot: r.Num("pbdot"), M2Msun: r.Num("m2_msun"), Sini: r.Num("sini")})
		default:
			t.Fatalf("%s: model %q", r, r.Str("model"))
		}
		if err != nil {
			t.Fatalf("%s: %v", r, err)
		}
		elements[r.Str("name")], stars[r.Str("name")] = e, starOf(r)
	}
	return elements, stars
}

// cycles is the distance of two phases round the circle.
func cycles(a, b float64) float64 { return math.Abs(math.Remainder(a-b, 1)) }

// allowedCycles is the tables' tolerance of a phase.
func allowedCycles(e Elements) float64 { return 0.1/86400/e.PbD + 2e-9 }

// TestBinaryPhaseTableAtGivenTimes checks everything that follows from a
// barycentric time, at the time the table gives: the site's own.
func TestBinaryPhaseTableAtGivenTimes(t *testing.T) {
	elements, _ := binaries(t)
	watch := func(what, unit string) *testdata.Largest { return testdata.Watch(t, "binary_phase: "+what, unit) }
	peri, node, conj := watch("phase from periastron", "cycles"), watch("phase from node", "cycles"), watch("phase from conjunction", "cycles")
	long, arg := watch("ELL1 mean longitude", "cycles"), watch("argument", "cycles")
	om, nu := watch("omega", "deg"), watch("true anomaly", "deg")
	roemer, shapiro := watch("orbital Roemer delay", "s"), watch("Shapiro delay", "us")
	for _, r := range testdata.Table(t, "binary_phase") {
		e, ok := elements[r.Str("source")]
		if !ok {
			t.Fatalf("%s: %s is not in the table of binaries", r, r.Str("source"))
		}
		at := timescale.NewMJD(int(r.Num("bary_tdb_mjd_day")), r.Num("bary_tdb_mjd_fraction"))
		s := e.At(at)
		const given = 5e-9 // the times have 1e-11 d, the phases 9 digits
		peri.Error(r, cycles(e.PhaseAt(Periastron, at), r.Num("phase_periastron")), given)
		node.Error(r, cycles(e.PhaseAt(Node, at), r.Num("phase_node")), given)
		conj.Error(r, cycles(e.PhaseAt(Conjunction, at), r.Num("phase_conjunction")), given)
		if r.Has("phase_ell1_mean") {
			long.Error(r, cycles(s.LongNode, r.Num("phase_ell1_mean")), given)
		}
		// The true anomaly moves faster than the mean one near periastron.
		speed := math.Sqrt(1-e.Ecc*e.Ecc) / math.Pow(1-e.Ecc*s.Eccentric.Cos(), 2)
		arg.Error(r, cycles(s.Argument.Rad()/turn, r.Num("argument_cycles")), given*max(1, speed))
		nu.Error(r, 360*cycles(s.True.Deg()/360, r.Num("true_anomaly_deg")/360), 360*given*speed+1e-5)
		om.Error(r, 360*cycles(s.Om.Deg()/360, r.Num("omega_deg")/360), 1e-5)
		roemer.Check(r, e.RoemerDelayS(at), r.Num("orbital_roemer_s"), 1e-6)
		shapiro.Check(r, 1e6*e.ShapiroDelayS(at), r.Num("shapiro_us"), 1e-3)
	}
}

// TestBinaryPhaseTableFromUTC goes the whole way from a UTC. The table's
// observer may stand at a site, up to 21 ms from the Earth's centre, which its
// tolerances hold.
func TestBinaryPhaseTableFromUTC(t *testing.T) {
	elements, stars := binaries(t)
	phase := map[Reference]*testdata.Largest{}
	columns := map[Reference]string{Periastron: "phase_periastron", Node: "phase_node", Conjunction: "phase_conjunction"}
	for ref, col := range columns {
		phase[ref] = testdata.Watch(t, "binary_phase from UTC: "+col, "s")
	}
	bary := testdata.Watch(t, "binary_phase from UTC: barycentric TDB", "s")
	nextC := testdata.Watch(t, "binary_phase from UTC: next conjunction", "s")
	nextP := testdata.Watch(t, "binary_phase from UTC: next periastron", "s")
	for _, r := range testdata.Table(t, "binary_phase") {
		name, at := r.Str("source"), r.Time("utc")
		e, star := elements[name], stars[name]
		got, err := BarycentricTDB(star, at)
		if err != nil {
			t.Fatal(err)
		}
		want := timescale.NewMJD(int(r.Num("bary_tdb_mjd_day")), r.Num("bary_tdb_mjd_fraction"))
		bary.Error(r, math.Abs(apartS(got, want)), roemerS+0.022)
		for ref, col := range columns {
			n, err := e.Turns(ref, star, at)
			if err != nil {
				t.Fatal(err)
			}
			secondsPerCycle := e.PbD * 86400
			phase[ref].Error(r, cycles(n, r.Num(col))*secondsPerCycle, allowedCycles(e)*secondsPerCycle)
		}
		conj, err := e.NextConjunction(star, at)
		if err != nil {
			t.Fatal(err)
		}
		nextC.Error(r, math.Abs(conj.Sub(r.Time("next_conjunction_utc")).Seconds()), 0.2)
		per, err := e.NextPeriastron(star, at)
		if err != nil {
			t.Fatal(err)
		}
		nextP.Error(r, math.Abs(per.Sub(r.Time("next_periastron_utc")).Seconds()), 0.2)
	}
}
