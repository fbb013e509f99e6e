//go:build erfa

package erfabench

/*
#cgo LDFLAGS: -lerfa -lm
#include <erfa.h>
#include <erfam.h>

// week fills az and el, times by stars, in radians: apco13 once a time, atciq
// and atioq once a star. The loops are in C, so that nothing of Go's calls is
// counted. The result is the first status of apco13 that is an error, or 0; a
// year beyond the library's table of leap seconds is none.
static int week(double day, double first, double step, int times, double dut1, double lon, double lat, double height,
		int stars, const double *ra, const double *dec, const double *pmra, const double *pmdec, double *az, double *el) {
	for (int i = 0; i < times; i++) {
		eraASTROM astrom;
		double eo;
		int status = eraApco13(day, first + i*step, dut1, lon, lat, height, 0, 0, 0, 0, 0, 0.55, &astrom, &eo);
		if (status < 0) return status;
		for (int j = 0; j < stars; j++) {
			double ri, di, zob, hob, dob, rob;
			eraAtciq(ra[j], dec[j], pmra[j], pmdec[j], 0, 0, &astrom, &ri, &di);
			eraAtioq(ri, di, &astrom, &az[i*stars+j], &zob, &hob, &dob, &rob);
			el[i*stars+j] = ERFA_DPI/2 - zob;
		}
	}
	return 0;
}
*/
import "C"

import (
	"fmt"
	"math"
	"time"

	"cadencewright/astro"
)

// Sampler holds stars and room for their places, so that sampling again
// allocates nothing.
type Sampler struct {
	// AzRad and ElRad are the places, in radians, of sample i and star j at
	// i·stars+j: azimuth from north through east, no refraction, no polar motion.
	AzRad, ElRad []float64

	site                 astro.Geodetic
	day, firstDay, step  float64 // of the first sample, as a two-part UTC Julian date; days
	times                int
	dut1S                float64
	ra, dec, pmRA, pmDec []C.double // radians, and radians a Julian year of ICRS angles
	az, el               []C.double
}

// New prepares n instants from start on, step apart, over a site. Positions of
// stars are of epoch J2000.0, as ERFA takes them.
func New(site astro.Geodetic, stars []astro.Star, start time.Time, step time.Duration, n int, dut1S float64) *Sampler {
	const mas = math.Pi / 180 / 3600e3
	s := &Sampler{site: site, day: 2440587.5 + math.Floor(float64(start.Unix())/86400), step: step.Hours() / 24, times: n, dut1S: dut1S,
		az: make([]C.double, n*len(stars)), el: make([]C.double, n*len(stars)), AzRad: make([]float64, n*len(stars)), ElRad: make([]float64, n*len(stars))}
	s.firstDay = start.Sub(start.Truncate(24*time.Hour)).Hours() / 24
	for _, x := range stars {
		s.ra, s.dec = append(s.ra, C.double(x.RA)), append(s.dec, C.double(x.Dec))
		// ERFA wants the motion in right ascension itself, without cos(dec).
		s.pmRA, s.pmDec = append(s.pmRA, C.double(x.PMRAMasYr*mas/x.Dec.Cos())), append(s.pmDec, C.double(x.PMDecMasYr*mas))
	}
	return s
}

// Sample works out every place and leaves it in the library's own memory; Read
// copies it out.
func (s *Sampler) Sample() error {
	status := C.week(C.double(s.day), C.double(s.firstDay), C.double(s.step), C.int(s.times), C.double(s.dut1S),
		C.double(s.site.Lon), C.double(s.site.Lat), C.double(s.site.HeightM),
		C.int(len(s.ra)), &s.ra[0], &s.dec[0], &s.pmRA[0], &s.pmDec[0], &s.az[0], &s.el[0])
	if status != 0 {
		return fmt.Errorf("eraApco13: status %d", int(status))
	}
	return nil
}

// Read copies the places that Sample found into AzRad and ElRad.
func (s *Sampler) Read() {
	for i := range s.az {
		s.AzRad[i], s.ElRad[i] = float64(s.az[i]), float64(s.el[i])
	}
}
