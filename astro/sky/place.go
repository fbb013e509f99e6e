package sky

import (
	"fmt"
	"math"
	"time"

	"cadencewright/astro"
	"cadencewright/astro/internal/meeus"
	"cadencewright/astro/timescale"
)

// Place is where a star stands over a site at one instant. Every number is
// finite, at the zenith and at the poles too, where an angle that has no meaning
// (azimuth at the zenith, hour angle at the pole) is some value of its range.
type Place struct {
	AzDeg  float64 // from north through east, [0, 360)
	ElDeg  float64
	HADeg  float64 // west-positive, (-180, 180]
	RADeg  float64 // apparent: true equator and equinox of date, [0, 360)
	DecDeg float64 // apparent
	SunDeg float64 // separation from the apparent Sun, at the Earth's centre

	// ParallacticDeg is the angle at the star from the direction of the pole to
	// that of the zenith, (-180, 180], positive west of the meridian: by how much
	// the sky has turned in the field of an altazimuth telescope.
	ParallacticDeg float64
}

// frame is what the sky needs at one instant, whatever the star: the way from
// ICRS to the true equator and equinox of date, and the Earth's velocity.
type frame struct {
	trueOfDate astro.Mat3
	velocity   astro.Vec3 // of the Earth, in units of c, ICRS
	tdb        float64    // MJD, for proper motion
}

// newFrame works out the frame at a Terrestrial Time. The velocity is the
// Earth's about the solar-system barycentre, not about the Sun: the Sun's own
// 0.009 arcsec of aberration comes with it.
func newFrame(tt timescale.MJD) frame {
	jde := tt.JD()
	return frame{trueOfDate: meeus.TrueOfDate(jde), velocity: meeus.EarthVelocity(jde), tdb: tt.Float()}
}

// apparentSun is the direction of the apparent Sun at a Terrestrial Time near
// the frame's own: in half a day the frame moves by 0.3 arcsec. Light time needs
// no step of its own, since the Sun hardly moves about the barycentre.
func (f *frame) apparentSun(tt timescale.MJD) astro.Vec3 {
	return f.trueOfDate.Apply(f.aberrate(meeus.EarthHeliocentric(tt.JD()).Scale(-1).Unit()))
}

// aberrate moves a geometric direction by annual aberration, to the second
// order in velocity (0.001 arcsec; Explanatory Supplement, 3rd ed., section
// 7.2.3.3, from memory). The factor sqrt(1 - v²) would move nothing by more than
// 1e-7 arcsec.
func (f *frame) aberrate(p astro.Vec3) astro.Vec3 {
	dot := p.Dot(f.velocity)
	return p.Add(f.velocity.Scale(1 + dot/2)).Unit()
}

// apparent is the star's apparent direction, true equator and equinox of date.
// All steps are vectors and rotations: first-order formulas in right ascension
// and declination err by arcseconds within a degree of the pole.
func (f *frame) apparent(s astro.Star) astro.Vec3 {
	return f.trueOfDate.Apply(f.aberrate(s.Direction(f.tdb)))
}

// checkSite refuses a site that is nowhere, which would make every number NaN.
func checkSite(site astro.Geodetic) error {
	if lat := site.Lat.Deg(); !(math.Abs(lat) <= 90) {
		return &astro.RangeError{Quantity: "latitude in degrees", Value: fmt.Sprint(lat), Allowed: "-90 to 90"}
	}
	if lon := site.Lon.Deg(); !(math.Abs(lon) <= 360) {
		return &astro.RangeError{Quantity: "longitude in degrees", Value: fmt.Sprint(lon), Allowed: "-360 to 360"}
	}
	return nil
}

// Observe finds a star over a site at one instant, everything worked out for
// that instant: 0.4 arcsec from ERFA's apco13, atciq and atioq without
// refraction and polar motion. The site's height does not matter for a star.
// dut1S is UT1-UTC in seconds; 0.9 s wrong is 13.5 arcsec wrong in hour angle. Use
// a Window for many instants.
func Observe(site astro.Geodetic, star astro.Star, t time.Time, dut1S float64) (Place, error) {
	if err := checkSite(site); err != nil {
		return Place{}, err
	}
	tt, err := timescale.TT(t)
	if err != nil {
		return Place{}, err
	}
	lst, err := timescale.LST(t, dut1S, site.Lon)
	if err != nil {
		return Place{}, err
	}
	f := newFrame(tt)
	d := f.apparent(star)
	p := over(d, lst, site.Lat)
	p.SunDeg = d.AngleTo(f.apparentSun(tt)).Deg()
	return p, nil
}

// over turns an apparent direction (a unit vector, true equator and equinox of
// date) into a place at a local apparent sidereal time and geodetic latitude, by
// a rotation to axes north, west and up (as Meeus, chapter 13, but in vectors,
// with azimuth from the north and longitude to the east).
func over(d astro.Vec3, lst, lat astro.Angle) Place {
	ra := d.Lon()
	ha := (lst - ra).WrapSigned()
	sinL, cosL := math.Sincos(float64(lst))
	sinPhi, cosPhi := math.Sincos(float64(lat))
	x := d[0]*cosL + d[1]*sinL // toward the meridian point of the equator
	w := d[0]*sinL - d[1]*cosL // toward the west
	north := d[2]*cosPhi - x*sinPhi
	up := d[2]*sinPhi + x*cosPhi
	return Place{
		AzDeg: azimuthDeg(north, w), ElDeg: elevationDeg(up, w, north),
		HADeg: ha.Deg(), RADeg: wrap360(ra.Deg()), DecDeg: d.Lat().Deg(),
		ParallacticDeg: parallactic(ha, d.Lat(), lat).Deg(),
	}
}

// parallactic is the angle at the star between the pole and the zenith,
// positive west of the meridian (Meeus, Astronomical Algorithms, chapter 14,
// multiplied through by cos(dec) to stay finite at the pole). Within arcseconds
// of the zenith it turns fast and means little; at the zenith it is 0.
func parallactic(ha, dec, lat astro.Angle) astro.Angle {
	return astro.Angle(math.Atan2(ha.Sin()*lat.Cos(), lat.Sin()*dec.Cos()-lat.Cos()*dec.Sin()*ha.Cos()))
}
