package scheduler

import (
	"fmt"

	"cadencewright/astro"
	"cadencewright/astro/orbit"
	"cadencewright/astro/sensitivity"
	"cadencewright/astro/sky"
)

// Site is where the telescope stands.
func (t *Telescope) Site() astro.Geodetic {
	return astro.Geodetic{Lon: astro.FromDeg(t.LongitudeDeg), Lat: astro.FromDeg(t.LatitudeDeg), HeightM: t.HeightM}
}

// Mask is the telescope's horizon; empty where it has none.
func (t *Telescope) Mask() sky.Mask {
	mask := make(sky.Mask, len(t.Horizon))
	for i, p := range t.Horizon {
		mask[i] = sky.MaskPoint{AzDeg: p.AzimuthDeg, ElDeg: p.ElevationDeg}
	}
	return mask
}

// Star is where the source stands, and its proper motion.
func (s *Source) Star() astro.Star {
	return astro.Star{RA: astro.FromDeg(s.RADeg), Dec: astro.FromDeg(s.DecDeg), PosEpochMJD: s.PosEpochMJD,
		PMRAMasYr: s.PMRAMasYr, PMDecMasYr: s.PMDecMasYr}
}

// Pulsar is the source as the radiometer equation sees it.
func (s *Source) Pulsar() sensitivity.Pulsar {
	return sensitivity.Pulsar{Star: s.Star(), PeriodS: s.PeriodS, FluxMJy: s.FluxMJy, FluxFreqMHz: s.FluxFreqMHz,
		SpectralIdx: s.SpectralIdx, WidthS: s.WidthS, Scatter1GHzS: s.Scatter1GHzS, JitterUs1h: s.JitterUs1h}
}

// FrontEnd is the receiver as the radiometer equation sees it.
func (r *Receiver) FrontEnd() sensitivity.Receiver {
	return sensitivity.Receiver{FreqMHz: r.FreqMHz, BandwidthMHz: r.BandwidthMHz, NPol: r.NPol, TrecK: r.TrecK,
		TatmK: r.TatmK, GainKPerJy: r.GainKPerJy, Digitisation: r.Digitisation}
}

// Elements are the orbit's elements. Those of a valid campaign are valid; the
// error names an unknown model or an element out of range.
func (b *Binary) Elements() (orbit.Elements, error) {
	switch b.Model {
	case BinaryKepler:
		return orbit.Kepler(orbit.KeplerParams{PbD: b.PbD, A1Ls: b.A1Ls, Ecc: b.Ecc, OmDeg: b.OmDeg, T0MJD: b.T0MJD,
			OmdotDegYr: b.OmdotDegYr, Pbdot: b.Pbdot, M2Msun: b.M2Msun, Sini: b.Sini})
	case BinaryELL1:
		return orbit.ELL1(orbit.ELL1Params{PbD: b.PbD, A1Ls: b.A1Ls, TascMJD: b.TascMJD, Eps1: b.Eps1, Eps2: b.Eps2,
			Pbdot: b.Pbdot, M2Msun: b.M2Msun, Sini: b.Sini})
	}
	return orbit.Elements{}, fmt.Errorf("binary model %q: must be kepler or ell1", b.Model)
}

// Point is the orbit's reference point that the name stands for; periastron
// for a name that is none (a valid campaign has none such).
func (r PhaseReference) Point() orbit.Reference {
	switch r {
	case RefNode:
		return orbit.Node
	case RefConjunction:
		return orbit.Conjunction
	}
	return orbit.Periastron
}
