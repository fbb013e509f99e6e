// Package sky finds where things stand over a telescope: apparent places,
// azimuth and elevation tracks, the Sun and the Moon, crossings of a limit,
// horizon masks, and how long an axis takes to move.
//
// # Conventions
//
// Angles leave this package in degrees. Azimuth runs from north through east,
// [0, 360); hour angle is positive west of the meridian, (-180, 180]; the
// parallactic angle is positive west of it too. Longitudes are east-positive,
// latitudes geodetic. Apparent right ascension and declination refer to the true
// equator and equinox of date. UT1-UTC is passed in, in seconds.
//
// # What a direction holds
//
// In this order: proper motion, annual aberration, precession and nutation,
// the turn of the Earth. The steps are those of an apparent place in the
// Explanatory Supplement to the Astronomical Almanac; theories are of 1976 to
// 1986 (see the almanac package), whose differences from those of 2006 mostly
// cancel between precession and sidereal time.
//
// Left out: parallax (a pulsar at 160 pc: 0.006 arcsec), diurnal aberration
// (0.32 arcsec times the cosine of the latitude), light deflection by the Sun
// (0.5 arcsec at 1 degree from it, 1.8 at its limb), polar motion (0.3 arcsec) and
// refraction (radio telescopes correct it themselves, and differently). The
// frame bias between ICRS and the mean equinox of 2000 (0.02 arcsec) is left
// out as well.
//
// # Accuracy
//
// Against the IAU routines (ERFA) in 2026 to 2030, the largest difference seen:
// 0.37 arcsec for a star, nearly all of it diurnal aberration and light
// deflection; 10 arcsec for the Sun, 9 for the Moon. By 2099 the star's figure grows by 0.2 arcsec. A window's tracks keep
// to the careful places within 0.02 arcsec.
//
// # Two ways to the same place
//
// Observe works everything out for one instant. A Window shares over a run of
// instants what all stars have in common, and costs a star a rotation and two
// inverse tangents a sample; its sines of elevation cost a tenth of that and are
// enough to test limits. The two share no more than the theories below them, so
// that each can check the other.
//
// Instants outside 1972 to 2099, sites that are nowhere and UT1-UTC beyond a
// second are errors (astro.RangeError), never numbers that are quietly wrong. A
// star whose own numbers are NaN has NaN places.
package sky
