package astro

import "math"

// Vec3 is a vector in some right-handed frame: x toward longitude 0 on the
// equator, z toward the pole.
type Vec3 [3]float64

// Mat3 is a rotation, by rows.
type Mat3 [3]Vec3

// Spherical is the unit vector at a longitude and latitude.
func Spherical(lon, lat Angle) Vec3 {
	sinLon, cosLon := math.Sincos(float64(lon))
	sinLat, cosLat := math.Sincos(float64(lat))
	return Vec3{cosLat * cosLon, cosLat * sinLon, sinLat}
}

// Dot is the scalar product.
func (a Vec3) Dot(b Vec3) float64 { return a[0]*b[0] + a[1]*b[1] + a[2]*b[2] }

// Cross is the vector product.
func (a Vec3) Cross(b Vec3) Vec3 {
	return Vec3{a[1]*b[2] - a[2]*b[1], a[2]*b[0] - a[0]*b[2], a[0]*b[1] - a[1]*b[0]}
}

// Add is the sum.
func (a Vec3) Add(b Vec3) Vec3 { return Vec3{a[0] + b[0], a[1] + b[1], a[2] + b[2]} }

// Scale is the vector times a number.
func (a Vec3) Scale(k float64) Vec3 { return Vec3{k * a[0], k * a[1], k * a[2]} }

// Norm is the length.
func (a Vec3) Norm() float64 { return math.Sqrt(a.Dot(a)) }

// Unit is the vector brought to length 1; the zero vector stays as it is.
func (a Vec3) Unit() Vec3 {
	n := a.Norm()
	if n == 0 {
		return a
	}
	return a.Scale(1 / n)
}

// Lon is the vector's longitude in [0, 2π).
func (a Vec3) Lon() Angle { return Angle(math.Atan2(a[1], a[0])).Wrap() }

// Lat is the vector's latitude in [-π/2, π/2].
func (a Vec3) Lat() Angle { return Angle(math.Atan2(a[2], math.Hypot(a[0], a[1]))) }

// AngleTo is the angle between two vectors, good for tiny angles and for
// nearly opposite ones, where the arc cosine is not.
func (a Vec3) AngleTo(b Vec3) Angle { return Angle(math.Atan2(a.Cross(b).Norm(), a.Dot(b))) }

// Apply is the rotation applied to a vector.
func (m Mat3) Apply(v Vec3) Vec3 { return Vec3{m[0].Dot(v), m[1].Dot(v), m[2].Dot(v)} }

// Mul is the rotation that applies n first, then m.
func (m Mat3) Mul(n Mat3) Mat3 {
	var r Mat3
	for i := range 3 {
		for j := range 3 {
			r[i][j] = m[i][0]*n[0][j] + m[i][1]*n[1][j] + m[i][2]*n[2][j]
		}
	}
	return r
}

// Transpose is the opposite rotation.
func (m Mat3) Transpose() Mat3 {
	var r Mat3
	for i := range 3 {
		for j := range 3 {
			r[i][j] = m[j][i]
		}
	}
	return r
}

// RotX turns the frame about its x axis: a vector's coordinates in the frame
// turned by the angle (R1 in the usual notation).
func RotX(a Angle) Mat3 {
	s, c := math.Sincos(float64(a))
	return Mat3{{1, 0, 0}, {0, c, s}, {0, -s, c}}
}

// RotZ turns the frame about its z axis (R3 in the usual notation).
func RotZ(a Angle) Mat3 {
	s, c := math.Sincos(float64(a))
	return Mat3{{c, s, 0}, {-s, c, 0}, {0, 0, 1}}
}
