package scheduler

import (
	"math"
	"strings"
	"testing"

	"cadencewright/astro/orbit"
	"cadencewright/testdata"
)

// TestElementsOfTheBinaryTable makes the model's two kinds of orbit from the
// table of binaries.
func TestElementsOfTheBinaryTable(t *testing.T) {
	for _, r := range testdata.Table(t, "binaries") {
		b := Binary{Model: BinaryModel(r.Str("model")), PbD: r.Num("pb_d"), A1Ls: r.Num("a1_ls"), Ecc: r.Num("ecc"), OmDeg: r.Num("om_deg"),
			T0MJD: r.Num("t0_mjd"), OmdotDegYr: r.Num("omdot_deg_yr"), TascMJD: r.Num("tasc_mjd"), Eps1: r.Num("eps1"), Eps2: r.Num("eps2"),
			Pbdot: r.Num("pbdot"), M2Msun: r.Num("m2_msun"), Sini: r.Num("sini")}
		e, err := b.Elements()
		if err != nil {
			t.Fatalf("%s: %v", r, err)
		}
		if e.ELL1 != (b.Model == BinaryELL1) || e.PbD != b.PbD || e.A1Ls != b.A1Ls || e.Pbdot != b.Pbdot || e.M2Msun != b.M2Msun || e.Sini != b.Sini {
			t.Errorf("%s: got %+v", r, e)
		}
		if e.ELL1 {
			if e.Eps1 != b.Eps1 || e.Eps2 != b.Eps2 || e.TascMJD != b.TascMJD || math.Abs(e.Ecc-math.Hypot(b.Eps1, b.Eps2)) > 1e-15 {
				t.Errorf("%s: got %+v", r, e)
			}
		} else if e.Ecc != b.Ecc || e.T0MJD != b.T0MJD || e.OmdotDegYr != b.OmdotDegYr || math.Abs(e.Om.Deg()-b.OmDeg) > 1e-12 {
			t.Errorf("%s: got %+v", r, e)
		}
	}
}

func TestUnknownBinaryModel(t *testing.T) {
	b := Binary{Model: "bt", PbD: 2, A1Ls: 1, T0MJD: 60000}
	if _, err := b.Elements(); err == nil || !strings.Contains(err.Error(), `"bt"`) {
		t.Errorf("model bt: %v", err)
	}
}

func TestReferencePointNames(t *testing.T) {
	for name, want := range map[PhaseReference]orbit.Reference{RefPeriastron: orbit.Periastron, RefNode: orbit.Node, RefConjunction: orbit.Conjunction} {
		if got := name.Point(); got != want || got.String() != string(name) {
			t.Errorf("%s: got %v", name, got)
		}
	}
}

func TestTelescopeAndSourceAsTheSkySeesThem(t *testing.T) {
	tel := Telescope{LongitudeDeg: -71.75, LatitudeDeg: 44.5, HeightM: 480, Horizon: []HorizonPoint{{0, 5}, {180, 15}}}
	if s := tel.Site(); math.Abs(s.Lon.Deg()+71.75) > 1e-12 || math.Abs(s.Lat.Deg()-44.5) > 1e-12 || s.HeightM != 480 {
		t.Errorf("site %+v", s)
	}
	if got := tel.Mask().ElevationDeg(90); got != 10 {
		t.Errorf("horizon half way between 5 and 15 deg: got %v", got)
	}
	src := Source{RADeg: 63, DecDeg: 18, PosEpochMJD: 57000, PMRAMasYr: 1, PMDecMasYr: 2, PeriodS: 0.005, FluxMJy: 1, FluxFreqMHz: 1400,
		SpectralIdx: -1.5, WidthS: 0.0002, Scatter1GHzS: 1e-6, JitterUs1h: 0.1}
	star := src.Star()
	if math.Abs(star.RA.Deg()-63) > 1e-12 || math.Abs(star.Dec.Deg()-18) > 1e-12 || star.PosEpochMJD != 57000 || star.PMRAMasYr != 1 || star.PMDecMasYr != 2 {
		t.Errorf("star %+v", star)
	}
	p := src.Pulsar()
	if p.Star != star || p.PeriodS != 0.005 || p.FluxMJy != 1 || p.FluxFreqMHz != 1400 || p.SpectralIdx != -1.5 || p.WidthS != 0.0002 ||
		p.Scatter1GHzS != 1e-6 || p.JitterUs1h != 0.1 {
		t.Errorf("pulsar %+v", p)
	}
	r := Receiver{FreqMHz: 1400, BandwidthMHz: 400, NPol: 2, TrecK: 20, TatmK: 3, GainKPerJy: 1.5, Digitisation: 1.1}
	f := r.FrontEnd()
	if f.FreqMHz != 1400 || f.BandwidthMHz != 400 || f.NPol != 2 || f.TrecK != 20 || f.TatmK != 3 || f.GainKPerJy != 1.5 || f.Digitisation != 1.1 {
		t.Errorf("front end %+v", f)
	}
}
