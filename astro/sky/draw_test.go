package sky_test

import (
	"time"

	"pgregory.net/rapid"

	"cadencewright/astro"
)

func drawSite(t *rapid.T) astro.Geodetic {
	return astro.Geodetic{
		Lon:     astro.FromDeg(rapid.Float64Range(-180, 180).Draw(t, "lon")),
		Lat:     astro.FromDeg(rapid.Float64Range(-89.9, 89.9).Draw(t, "lat")),
		HeightM: rapid.Float64Range(0, 5000).Draw(t, "height"),
	}
}

func drawStar(t *rapid.T) astro.Star {
	return astro.Star{
		RA:          astro.FromDeg(rapid.Float64Range(0, 360).Draw(t, "ra")),
		Dec:         astro.FromDeg(rapid.Float64Range(-89.9, 89.9).Draw(t, "dec")),
		PosEpochMJD: 55000,
		PMRAMasYr:   rapid.Float64Range(-200, 200).Draw(t, "pmra"),
		PMDecMasYr:  rapid.Float64Range(-200, 200).Draw(t, "pmdec"),
	}
}

func drawTime(t *rapid.T) time.Time {
	base := time.Date(2026, 1, 1, 0, 0, 0, 0, time.UTC)
	return base.Add(time.Duration(rapid.Int64Range(0, 5*365*86400).Draw(t, "second")) * time.Second)
}
