package sensitivity

import "math"

// Seconds in a day and in a Julian year.
const (
	dayS  = 86400.0
	yearS = 365.25 * dayS
)

// HellingsDowns is the correlation that an isotropic background of
// gravitational waves gives the residuals of two pulsars angleDeg apart,
// [0, 180] (Hellings & Downs 1983, ApJ 265, L39):
//
//	3/2 x ln x - x/4 + 1/2,  x = (1 - cos angle)/2
//
// normalised to 0.5 at 0 for two different pulsars in one direction.
func HellingsDowns(angleDeg float64) float64 {
	s := math.Sin(angleDeg * math.Pi / 360)
	x := s * s // (1 - cos)/2, without its cancellation at small angles
	if x == 0 {
		return 0.5
	}
	return 1.5*x*math.Log(x) - x/4 + 0.5
}

// GWLowestNHz is the lowest frequency of gravitational waves that data of the
// given span resolve, 1/span, in nanohertz.
func GWLowestNHz(spanYr float64) float64 { return 1e9 / (spanYr * yearS) }

// GWHighestNHz is the highest frequency that observing every cadenceD days
// reaches, 1/(2·cadence), in nanohertz.
func GWHighestNHz(cadenceD float64) float64 { return 1e9 / (2 * cadenceD * dayS) }
