package sensitivity

import (
	"math"

	"cadencewright/astro"
)

// toGalactic turns ICRS vectors into Galactic ones: rows are the Galactic
// axes in the ICRS. It is the definition of 1958 (north pole at B1950 12h49m
// +27.4°, and the position angle of the centre 123°) carried to the ICRS as
// in the Hipparcos catalogue (ESA SP-1200, 1997, vol. 1, section 1.5.3): pole
// 192.85948°, +27.12825°, longitude of the celestial pole 122.93192°. The
// digits are those that the IAU's software publishes for it.
var toGalactic = [3]astro.Vec3{
	{-0.054875560416215368492398900454, -0.873437090234885048760383168409, -0.483835015548713226831774175116},
	{+0.494109427875583673525222371358, -0.444829629960011178146614061616, +0.746982244497218890527388004556},
	{-0.867666149019004701181616534570, -0.198076373431201528180486091412, +0.455983776175066922272100478348},
}

// Galactic is the Galactic longitude, [0, 360°), and latitude of a star at
// its catalogue epoch. At the Galactic poles the longitude is arbitrary.
func Galactic(s astro.Star) (l, b astro.Angle) {
	sinDec, cosDec := math.Sincos(s.Dec.Rad())
	sinRA, cosRA := math.Sincos(s.RA.Rad())
	icrs := astro.Vec3{cosDec * cosRA, cosDec * sinRA, sinDec}
	x, y, z := toGalactic[0].Dot(icrs), toGalactic[1].Dot(icrs), toGalactic[2].Dot(icrs)
	l = astro.Angle(math.Atan2(y, x)).Wrap()
	return l, astro.Angle(math.Atan2(z, math.Hypot(x, y)))
}
