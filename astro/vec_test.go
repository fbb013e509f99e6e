package astro_test

import (
	"math"
	"testing"

	"pgregory.net/rapid"

	"cadencewright/astro"
)

func drawVec(t *rapid.T, name string) astro.Vec3 {
	x := rapid.Float64Range(-10, 10)
	return astro.Vec3{x.Draw(t, name+"x"), x.Draw(t, name+"y"), x.Draw(t, name+"z")}
}

func drawAngle(t *rapid.T, name string) astro.Angle {
	return astro.Angle(rapid.Float64Range(-7, 7).Draw(t, name))
}

func closeTo(a, b astro.Vec3, tol float64) bool { return a.Add(b.Scale(-1)).Norm() <= tol }

func TestSphericalAxes(t *testing.T) {
	for _, c := range []struct {
		lon, lat float64
		want     astro.Vec3
	}{
		{0, 0, astro.Vec3{1, 0, 0}}, {90, 0, astro.Vec3{0, 1, 0}}, {180, 0, astro.Vec3{-1, 0, 0}}, {33, 90, astro.Vec3{0, 0, 1}}, {0, -90, astro.Vec3{0, 0, -1}},
	} {
		if got := astro.Spherical(astro.FromDeg(c.lon), astro.FromDeg(c.lat)); !closeTo(got, c.want, 1e-15) {
			t.Errorf("longitude %g, latitude %g: %v, want %v", c.lon, c.lat, got, c.want)
		}
	}
}

func TestSphericalRoundTrip(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		lon := astro.FromDeg(rapid.Float64Range(0, 359.999).Draw(t, "lon"))
		lat := astro.FromDeg(rapid.Float64Range(-89.9, 89.9).Draw(t, "lat"))
		v := astro.Spherical(lon, lat).Scale(rapid.Float64Range(0.1, 1e9).Draw(t, "length"))
		if d := math.Abs((v.Lon() - lon).WrapSigned().Rad()); d > 1e-12 {
			t.Errorf("longitude %g came back as %g", lon, v.Lon())
		}
		if d := math.Abs((v.Lat() - lat).Rad()); d > 1e-12 {
			t.Errorf("latitude %g came back as %g", lat, v.Lat())
		}
	})
}

func TestVectorAlgebra(t *testing.T) {
	x, y, z := astro.Vec3{1, 0, 0}, astro.Vec3{0, 1, 0}, astro.Vec3{0, 0, 1}
	if x.Cross(y) != z || y.Cross(z) != x || z.Cross(x) != y {
		t.Error("the axes are not right-handed")
	}
	if n := (astro.Vec3{2, 3, 6}).Norm(); n != 7 {
		t.Errorf("the length of (2, 3, 6) is %g, want 7", n)
	}
	if u := (astro.Vec3{}).Unit(); u != (astro.Vec3{}) {
		t.Errorf("the zero vector became %v", u)
	}
	rapid.Check(t, func(t *rapid.T) {
		a, b := drawVec(t, "a"), drawVec(t, "b")
		c := a.Cross(b)
		if math.Abs(c.Dot(a)) > 1e-9 || math.Abs(c.Dot(b)) > 1e-9 {
			t.Error("the product is not perpendicular to its factors")
		}
		// Lagrange's identity binds the two products.
		if lhs, rhs := c.Dot(c)+a.Dot(b)*a.Dot(b), a.Dot(a)*b.Dot(b); math.Abs(lhs-rhs) > 1e-9*(1+rhs) {
			t.Errorf("|a×b|² + (a·b)² is %g, |a|²|b|² is %g", lhs, rhs)
		}
		if n := a.Unit().Norm(); a.Norm() > 1e-100 && math.Abs(n-1) > 1e-12 {
			t.Errorf("the unit vector has length %g", n)
		}
	})
}

// Meeus, Astronomical Algorithms, example 17.a and page 110: Arcturus to Spica,
// Aldebaran to Antares. ERFA's own test of sepp gives the third.
func TestAngleToExamples(t *testing.T) {
	hms := func(h, m, s float64) astro.Angle { return astro.FromHours(h + m/60 + s/3600) }
	dms := func(sign, d, m, s float64) astro.Angle { return astro.FromDeg(sign * (d + m/60 + s/3600)) }
	for _, c := range []struct {
		name      string
		a, b      astro.Vec3
		want, tol float64 // degrees
	}{
		{"17.a", astro.Spherical(hms(14, 15, 39.7), dms(1, 19, 10, 57)), astro.Spherical(hms(13, 25, 11.6), dms(-1, 11, 9, 41)), 32.7930, 0.00006},
		{"17, page 110", astro.Spherical(hms(4, 35, 55.2), dms(1, 16, 30, 33)), astro.Spherical(hms(16, 29, 24), dms(-1, 26, 25, 55)), 169 + 58.0/60, 0.5 / 60},
		{"ERFA seps", astro.Spherical(1, 0.1), astro.Spherical(0.2, -3), astro.Angle(2.346722016996998842).Deg(), 1e-12},
	} {
		if got := c.a.AngleTo(c.b).Deg(); math.Abs(got-c.want) > c.tol {
			t.Errorf("%s: %.6f deg, want %.6f", c.name, got, c.want)
		}
	}
}

// The separation is good where the arc cosine of a scalar product is not: for
// close pairs, across right ascension 0h, at the poles and opposite each other.
func TestAngleToIsGoodEverywhere(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		lat := astro.FromDeg(rapid.Float64Range(-90, 90).Draw(t, "lat"))
		apart := astro.FromArcsec(math.Exp(rapid.Float64Range(math.Log(1e-4), math.Log(3600)).Draw(t, "log arcsec")))
		if math.Abs((lat + apart).Deg()) > 90 {
			return
		}
		lon := astro.FromDeg(rapid.SampledFrom([]float64{0, 359.9999999, 180, 77}).Draw(t, "lon"))
		a, b := astro.Spherical(lon, lat), astro.Spherical(lon, lat+apart)
		if got := a.AngleTo(b); math.Abs((got - apart).Rad()) > 1e-15+1e-6*apart.Rad() {
			t.Errorf("%.3g arcsec apart came back as %.6g", apart.Arcsec(), got.Arcsec())
		}
		if got := a.AngleTo(b.Scale(-1)); math.Abs((math.Pi - got - apart).Rad()) > 1e-15+1e-6*apart.Rad() {
			t.Errorf("%.3g arcsec from opposite came back as %.6g", apart.Arcsec(), (math.Pi - got).Arcsec())
		}
	})
	// 0.002 deg across 0h, which a careless formula makes 359.998.
	a, b := astro.Spherical(astro.FromDeg(359.999), 0), astro.Spherical(astro.FromDeg(0.001), 0)
	if got := a.AngleTo(b).Deg(); math.Abs(got-0.002) > 1e-12 {
		t.Errorf("across 0h: %g deg, want 0.002", got)
	}
}

func TestRotations(t *testing.T) {
	// A frame turned by a quarter: what lay along y now lies along x.
	if got := astro.RotZ(math.Pi / 2).Apply(astro.Vec3{0, 1, 0}); !closeTo(got, astro.Vec3{1, 0, 0}, 1e-15) {
		t.Errorf("R3(90 deg) takes y to %v", got)
	}
	if got := astro.RotX(math.Pi / 2).Apply(astro.Vec3{0, 0, 1}); !closeTo(got, astro.Vec3{0, 1, 0}, 1e-15) {
		t.Errorf("R1(90 deg) takes z to %v", got)
	}
	rapid.Check(t, func(t *rapid.T) {
		m := astro.RotX(drawAngle(t, "a")).Mul(astro.RotZ(drawAngle(t, "b"))).Mul(astro.RotX(drawAngle(t, "c")))
		v, w := drawVec(t, "v"), drawVec(t, "w")
		if math.Abs(m.Apply(v).Dot(m.Apply(w))-v.Dot(w)) > 1e-10 {
			t.Error("a rotation changed a scalar product")
		}
		if !closeTo(m.Transpose().Apply(m.Apply(v)), v, 1e-12) {
			t.Error("the transpose does not turn back")
		}
		n := astro.RotZ(drawAngle(t, "d"))
		if !closeTo(m.Mul(n).Apply(v), m.Apply(n.Apply(v)), 1e-12) {
			t.Error("a product of rotations is not one after the other")
		}
		if !closeTo(m.Apply(v.Cross(w)), m.Apply(v).Cross(m.Apply(w)), 1e-10) {
			t.Error("a rotation changed the handedness")
		}
	})
}
