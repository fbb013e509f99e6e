package sensitivity_test

import (
	"math"
	"strconv"
	"strings"
	"testing"

	"cadencewright/astro/orbit"
	"cadencewright/astro/sensitivity"
	"cadencewright/testdata"
)

// inputs are the named values of one row; asking for one that is not there
// fails the test.
type inputs struct {
	t      *testing.T
	row    testdata.Row
	values map[string]float64
}

func inputsOf(t *testing.T, r testdata.Row) inputs {
	in := inputs{t, r, map[string]float64{}}
	for _, pair := range strings.Split(r.Str("inputs"), ";") {
		name, text, ok := strings.Cut(pair, "=")
		v, err := strconv.ParseFloat(text, 64)
		if !ok || err != nil {
			t.Fatalf("%s: input %q", r, pair)
		}
		in.values[name] = v
	}
	return in
}

func (in inputs) get(name string) float64 {
	v, ok := in.values[name]
	if !ok {
		in.t.Fatalf("%s: there is no input %q", in.row, name)
	}
	return v
}

// variance is the one-second variance of the row's width, rate and jitter.
func variance(in inputs) float64 {
	return sensitivity.OneSecondVariance(in.get("width_s"), in.get("snr_rate_per_sqrt_s"), in.get("jitter_us_1h"))
}

// receiverOf is the row's receiver, as far as the radiometer equation uses it.
func receiverOf(in inputs) sensitivity.Receiver {
	return sensitivity.Receiver{BandwidthMHz: in.get("bandwidth_mhz"), NPol: int(in.get("npol")),
		GainKPerJy: in.get("gain_k_per_jy"), Digitisation: in.get("digitisation")}
}

// formulas compute the table's value, in the table's unit.
var formulas = map[string]func(in inputs) float64{
	"t_sky": func(in inputs) float64 {
		return sensitivity.SkyTempK(in.get("l_deg"), in.get("b_deg"), in.get("freq_mhz"))
	},
	"t_sys": func(in inputs) float64 {
		sky := sensitivity.SkyTempK(in.get("l_deg"), in.get("b_deg"), in.get("freq_mhz"))
		return sensitivity.SystemTempK(in.get("trec_k"), in.get("tatm_k"), sky, in.get("el_deg"))
	},
	"flux": func(in inputs) float64 {
		return sensitivity.FluxMJy(in.get("flux_mjy"), in.get("flux_freq_mhz"), in.get("spectral_index"), in.get("freq_mhz"))
	},
	"scatter": func(in inputs) float64 { return sensitivity.ScatterS(in.get("scatter_1ghz_s"), in.get("freq_mhz")) },
	"width":   func(in inputs) float64 { return sensitivity.BroadenedWidthS(in.get("width_s"), in.get("tau_s")) },
	"snr_rate": func(in inputs) float64 {
		return sensitivity.SNRRate(in.get("flux_mjy"), receiverOf(in), in.get("tsys_k"), in.get("period_s"), in.get("width_s"))
	},
	"snr":          func(in inputs) float64 { return sensitivity.SNR(in.get("snr_rate_per_sqrt_s"), in.get("time_s")) },
	"toa_us":       func(in inputs) float64 { return sensitivity.TOAUs(variance(in), in.get("time_s")) },
	"time_for_toa": func(in inputs) float64 { return sensitivity.TimeForTOAS(variance(in), in.get("toa_us")) },
	"bhat2004":     func(in inputs) float64 { return sensitivity.BhatScatterS(in.get("dm_pc_cm3"), in.get("freq_mhz")) },
	"scint_bw": func(in inputs) float64 {
		return sensitivity.ScintBandwidthMHz(in.get("scint_bw_mhz"), in.get("ref_freq_mhz"), in.get("freq_mhz"))
	},
	"scint_time": func(in inputs) float64 {
		return sensitivity.ScintTimeS(in.get("scint_time_s"), in.get("ref_freq_mhz"), in.get("freq_mhz"))
	},
	"n_scintles": func(in inputs) float64 {
		return sensitivity.Scintles(in.get("time_s"), in.get("scint_time_s"), in.get("bandwidth_mhz"), in.get("scint_bw_mhz"), in.get("filling"))
	},
	"snr_scatter": func(in inputs) float64 { return sensitivity.SNRScatter(in.get("n_scintles")) },
	"dm_delay": func(in inputs) float64 {
		return sensitivity.DispersionDelayS(in.get("dm_pc_cm3"), in.get("freq1_mhz"), in.get("freq2_mhz"))
	},
	"sw_dm": func(in inputs) float64 {
		return sensitivity.SolarWindDM(in.get("n_e_1au_cm3"), in.get("elongation_deg"), in.get("earth_sun_au"))
	},
	"sw_delay": func(in inputs) float64 {
		return sensitivity.SolarWindDelayUs(in.get("n_e_1au_cm3"), in.get("elongation_deg"), in.get("earth_sun_au"), in.get("freq_mhz"))
	},
	"hd":      func(in inputs) float64 { return sensitivity.HellingsDowns(in.get("angle_deg")) },
	"gw_low":  func(in inputs) float64 { return sensitivity.GWLowestNHz(in.get("span_yr")) },
	"gw_high": func(in inputs) float64 { return sensitivity.GWHighestNHz(in.get("cadence_d")) },
	"stig":    func(in inputs) float64 { return orbit.Stigma(in.get("sini")) },
	"h3_us":   func(in inputs) float64 { return orbit.H3Us(in.get("m2_msun"), in.get("sini")) },
	"massfn":  func(in inputs) float64 { return orbit.MassFunctionMsun(in.get("pb_d"), in.get("a1_ls")) },
	"omdot_gr": func(in inputs) float64 {
		return orbit.PeriastronAdvanceDegYr(in.get("pb_d"), in.get("ecc"), in.get("m1_msun"), in.get("m2_msun"))
	},
}

// TestSensitivityTable computes every row; a formula that is not known here
// is a failure.
func TestSensitivityTable(t *testing.T) {
	worst := testdata.Watch(t, "sensitivity: relative error", "")
	seen := map[string]bool{}
	for _, r := range testdata.Table(t, "sensitivity") {
		formula, ok := formulas[r.Str("formula")]
		if !ok {
			t.Errorf("%s: formula %q is not known", r, r.Str("formula"))
			continue
		}
		seen[r.Str("formula")] = true
		want := r.Num("value")
		worst.Error(r, math.Abs(formula(inputsOf(t, r))/want-1), r.Num("rel_tol"))
	}
	for name := range formulas {
		if !seen[name] {
			t.Logf("the table has no row for %q", name)
		}
	}
}
