package site

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/integrate/quad"

	"knell/internal/random"
)

const someGPS = 1400000123.25

func TestResponseInvariance(t *testing.T) {
	// Turning the wave's axes turns (F+, Fx) by twice the angle.
	rng := random.New(11, "site test", 0)
	for _, code := range Codes() {
		s := lookup(t, code)
		for range 50 {
			ra, dec := 2*math.Pi*rng.Float64(), math.Asin(2*rng.Float64()-1)
			psi := math.Pi * rng.Float64()
			p0, c0 := s.Response(ra, dec, 0, someGPS)
			p, c := s.Response(ra, dec, psi, someGPS)
			if d := p*p + c*c - p0*p0 - c0*c0; math.Abs(d) > 1e-14 {
				t.Errorf("%s: F+^2+Fx^2 changes by %g under a turn of %g", code, d, psi)
			}
			wantP := p0*math.Cos(2*psi) + c0*math.Sin(2*psi)
			wantC := c0*math.Cos(2*psi) - p0*math.Sin(2*psi)
			if math.Abs(p-wantP) > 1e-14 || math.Abs(c-wantC) > 1e-14 {
				t.Errorf("%s: turned response (%g, %g), want (%g, %g)", code, p, c, wantP, wantC)
			}
		}
	}
}

func TestSkyAverage(t *testing.T) {
	// For a symmetric traceless D the sky average of F+^2+Fx^2 is (4/5) D:D =
	// (2/5) (1 - (X.Y)^2). The integrand is a polynomial of degree four in the
	// direction, so 8 Gauss-Legendre points in sin(dec) and 16 even points in right
	// ascension integrate it exactly.
	for _, code := range Codes() {
		s := lookup(t, code)
		got := quad.Fixed(func(sine float64) float64 {
			var sum float64
			for i := range 16 {
				p, c := s.Response(2*math.Pi*float64(i)/16, math.Asin(sine), 0.3, someGPS)
				sum += p*p + c*c
			}
			return sum / 16
		}, -1, 1, 8, quad.Legendre{}, 0) / 2
		c := dot(s.X, s.Y)
		if want := 0.4 * (1 - c*c); math.Abs(got-want) > 1e-14 {
			t.Errorf("%s: average %.16f, want %.16f", code, got, want)
		}
		if math.Abs(got-0.4) > 1e-6 {
			t.Errorf("%s: average %.9f, want 2/5", code, got)
		}
	}
	// Arms at 60 degrees answer sin 60 as strongly.
	third, err := New("T1", 0.7, 0.2, 0, 0.1, 0.1+math.Pi/3, 0, 0)
	if err != nil {
		t.Fatal(err)
	}
	right, err := New("T2", 0.7, 0.2, 0, 0.1-math.Pi/12, 0.1+5*math.Pi/12, 0, 0)
	if err != nil {
		t.Fatal(err)
	}
	p60, c60 := third.Response(1, 0.4, 0.2, someGPS)
	p90, c90 := right.Response(1, 0.4, 0.2, someGPS)
	for _, d := range []float64{p60 - p90*math.Sqrt(3)/2, c60 - c90*math.Sqrt(3)/2} {
		if math.Abs(d) > 1e-15 {
			t.Errorf("60-degree arms differ from sin 60 of a right angle by %g", d)
		}
	}
}

func TestResponseLocalFrame(t *testing.T) {
	// At the north pole with X towards longitude 0 and Y towards 90 E the local frame
	// is the earth-fixed one, and the textbook factors hold with theta = pi/2 - dec,
	// phi = ra - sidereal time (arXiv:gr-qc/9804014). Their polarisation angle runs
	// the other way and from the other axis: pi/2 - psi.
	pole, err := New("P1", math.Pi/2, 0, 0, math.Pi, math.Pi/2, 0, 0)
	if err != nil {
		t.Fatal(err)
	}
	rng := random.New(11, "site test", 1)
	for range 100 {
		ra, dec := 2*math.Pi*rng.Float64(), math.Asin(2*rng.Float64()-1)
		psi := math.Pi * rng.Float64()
		phi, cosTheta := ra-SiderealTime(someGPS), math.Sin(dec)
		local := math.Pi/2 - psi
		even := (1 + cosTheta*cosTheta) / 2 * math.Cos(2*phi)
		odd := cosTheta * math.Sin(2*phi)
		wantP := even*math.Cos(2*local) - odd*math.Sin(2*local)
		wantC := even*math.Sin(2*local) + odd*math.Cos(2*local)
		p, c := pole.Response(ra, dec, psi, someGPS)
		if math.Abs(p-wantP) > 1e-14 || math.Abs(c-wantC) > 1e-14 {
			t.Errorf("(%g, %g, %g): (%g, %g), want (%g, %g)", ra, dec, psi, p, c, wantP, wantC)
		}
	}
	// Anywhere else: altitude and azimuth by spherical trigonometry, and the strength
	// of both polarisations together from the same factors.
	const latitude, longitude, arm = -0.61, 2.2, 0.9
	s, err := New("Q1", latitude, longitude, 300, arm, arm-math.Pi/2, 0, 0)
	if err != nil {
		t.Fatal(err)
	}
	for range 100 {
		ra, dec := 2*math.Pi*rng.Float64(), math.Asin(2*rng.Float64()-1)
		hour := SiderealTime(someGPS) + longitude - ra
		sinAlt := math.Sin(latitude)*math.Sin(dec) + math.Cos(latitude)*math.Cos(dec)*math.Cos(hour)
		azimuth := math.Atan2(-math.Cos(dec)*math.Sin(hour),
			math.Sin(dec)*math.Cos(latitude)-math.Cos(dec)*math.Cos(hour)*math.Sin(latitude))
		phi := arm - azimuth // anticlockwise from the X arm
		even := (1 + sinAlt*sinAlt) / 2 * math.Cos(2*phi)
		odd := sinAlt * math.Sin(2*phi)
		p, c := s.Response(ra, dec, 0.4, someGPS)
		if got, want := p*p+c*c, even*even+odd*odd; math.Abs(got-want) > 1e-13 {
			t.Errorf("(%g, %g): F+^2+Fx^2 = %g, want %g", ra, dec, got, want)
		}
	}
}

func TestDelay(t *testing.T) {
	h, l := lookup(t, "H1"), lookup(t, "L1")
	limit := baseline(h, l)
	rng := random.New(11, "site test", 2)
	var largest float64
	for range 5000 {
		ra, dec := 2*math.Pi*rng.Float64(), math.Asin(2*rng.Float64()-1)
		d := math.Abs(h.Delay(ra, dec, someGPS) - l.Delay(ra, dec, someGPS))
		if d > limit {
			t.Fatalf("H1 and L1 differ by %g s, more than light's %g s", d, limit)
		}
		largest = max(largest, d)
	}
	// 5000 directions come within an angle of about 2/sqrt(5000) of the baseline.
	if largest < 0.998*limit {
		t.Errorf("the largest delay is %g s, want close to %g s", largest, limit)
	}
	// Overhead at a pole the wave arrives early by the polar radius over c.
	pole, err := New("P1", math.Pi/2, 0, 0, 0, math.Pi/2, 0, 0)
	if err != nil {
		t.Fatal(err)
	}
	// want: -6356752.314245 m / 299792458 m/s.
	if got, want := pole.Delay(1, math.Pi/2, someGPS), -0.021203843341; math.Abs(got-want) > 1e-11 {
		t.Errorf("pole overhead: %.13f s, want %.12f", got, want)
	}
}

func TestResponseAllocates(t *testing.T) {
	s := lookup(t, "H1")
	if n := testing.AllocsPerRun(100, func() {
		s.Response(1, 0.2, 0.3, someGPS)
		s.Delay(1, 0.2, someGPS)
	}); n != 0 {
		t.Errorf("%g allocations, want 0", n)
	}
}
