package kerr

import (
	"fmt"
	"math"
	"math/cmplx"
	"testing"

	"knell/internal/checktable"
	"knell/internal/random"
)

func fastestGrowth(t testing.TB, l, m int, parity Parity, spin, x0, phase float64, law func(float64) float64) (complex128, bool) {
	t.Helper()
	omega, growing, err := FastestGrowth(l, m, parity, spin, x0, phase, law)
	if err != nil {
		t.Fatalf("(%d,%d) spin %g surface at %g: %v", l, m, spin, x0, err)
	}
	if growing != (imag(omega) > 0) {
		t.Fatalf("(%d,%d) spin %g surface at %g: growing %v with ω = %g", l, m, spin, x0, growing, omega)
	}
	return omega, growing
}

// roundTrip is q at real ω from BarrierResponse.
func roundTrip(t testing.TB, l, m int, parity Parity, spin, x0, phase, omega float64, law func(float64) float64) complex128 {
	t.Helper()
	res, err := BarrierResponse(l, m, spin, omega, parity)
	if err != nil {
		t.Fatal(err)
	}
	k := omega - float64(m)*HorizonFrequency(spin)
	return res.Reflection * cmplx.Rect(law(k), phase-2*k*x0)
}

// TestPhysicsGrowthInTime is the echo train itself, from responses at real
// frequencies only: with a narrow pulse z around one mode,
//
//	h(t) = Σ_ω z(ω) (1 + q + ... + q^N) exp(-iωt),
//
// each echo is fainter or louder than the one before by |q|, and after many of them
// h goes as exp(-iωt) with that mode's complex ω. No continuation is involved.
func TestPhysicsGrowthInTime(t *testing.T) {
	table := checktable.New(t, "growth rate of the fastest mode against the echo train in time")
	for _, tc := range []struct {
		l, m   int
		parity Parity
		spin   float64
		x0     float64
		law    func(float64) float64
		name   string
	}{
		{2, 2, Odd, 0.7, -200, constantLaw(1), "Rs = 1"},
		{2, 2, Even, 0.9, -440, constantLaw(0.98), "Rs = 0.98"},
		{2, 2, Odd, 0.95, -60, constantLaw(1), "Rs = 1"},
		{3, 3, Odd, 0.9, -100, constantLaw(1), "Rs = 1"},
		{2, 2, Odd, 0.99, -900, boltzmannLaw(0.99, 6), "Boltzmann, 6 T_H"},
		{2, -2, Odd, 0.9, -100, constantLaw(1), "Rs = 1"},
	} {
		const phase = 0.7
		omega, growing := fastestGrowth(t, tc.l, tc.m, tc.parity, tc.spin, tc.x0, phase, tc.law)
		if !growing {
			t.Fatalf("%+v: not growing", tc)
		}
		const h = 1e-5
		q := func(w float64) complex128 {
			return roundTrip(t, tc.l, tc.m, tc.parity, tc.spin, tc.x0, phase, w, tc.law)
		}
		delay := cmplx.Phase(q(real(omega)+h)/q(real(omega)-h)) / (2 * h)
		spacing := 2 * math.Pi / delay
		// The pulse is 0.12 of the spacing wide: the next mode is out by exp(-34). The
		// step in ω makes h repeat after 300 delays; 120 echoes last 120 delays.
		width, step := 0.12*spacing, spacing/300
		const echoes = 120
		t1, t2 := 60*delay, 100*delay
		var h1, h2 complex128
		for j := -int(8 * width / step); j <= int(8*width/step); j++ {
			w := real(omega) + float64(j)*step
			z := math.Exp(-(w - real(omega)) * (w - real(omega)) / (2 * width * width))
			sum, one := complex128(0), q(w)
			for range echoes + 1 {
				sum = sum*one + 1
			}
			sum *= complex(z, 0)
			h1 += sum * cmplx.Rect(1, -w*t1)
			h2 += sum * cmplx.Rect(1, -w*t2)
		}
		ratio := cmplx.Log(h2 / h1 * cmplx.Exp(complex(0, real(omega)*(t2-t1))))
		name := fmt.Sprintf("(%d,%d) spin %g, surface at %g, %s", tc.l, tc.m, tc.spin, tc.x0, tc.name)
		table.Relative("Im ω "+name, imag(omega), real(ratio)/(t2-t1), 1e-5, "echo train")
		table.Absolute("Re ω "+name, real(omega), real(omega)-imag(ratio)/(t2-t1), 1e-9, "echo train")
	}
}

// TestPhysicsSlowGrowth: at low spin and with a surface far in, the rate follows from
// the law of slow waves at the mode's ω, to the order ω² that it is correct to:
//
//	Im ω = (|R|² - 1)/(2 · 2|x0|).
func TestPhysicsSlowGrowth(t *testing.T) {
	table := checktable.New(t, "growth rate with a perfectly reflecting surface at low spin")
	for _, tc := range []struct {
		l, m     int
		spin, x0 float64
	}{{2, 2, 0.01, -1e6}, {2, 2, 0.001, -1e7}, {2, 1, 0.003, -1e7}, {3, 3, 0.001, -1e7}} {
		omega, _ := fastestGrowth(t, tc.l, tc.m, Odd, tc.spin, tc.x0, 0, constantLaw(1))
		b := newBand(tc.l, tc.m, tc.spin)
		want := b.lowestOrderGain(b.turn-real(omega)) / (4 * math.Abs(tc.x0))
		// The delay also has the way out to where the wave turns, l(l+1)/ω at most.
		tol := 100*real(omega)*real(omega) + float64(tc.l*(tc.l+1))/real(omega)/math.Abs(tc.x0)
		table.Relative(fmt.Sprintf("Im ω (%d,%d) spin %g, surface at %g", tc.l, tc.m, tc.spin, tc.x0), imag(omega), want, tol, "law of slow waves: Sov. Phys. JETP 37, 28 (1973)")
	}
}

// TestFastestGrowthIsFastest looks for a faster mode in two ways that do not know how
// the fastest is chosen: by the first estimate at every mode of the band, from
// direct responses, and by the number of zeros of 1 - q above the mode found.
func TestFastestGrowthIsFastest(t *testing.T) {
	rng := random.New(9, "fastest")
	for i := range 10 {
		l := 2 + i%2
		spin := math.Tanh((0.3 + 0.7*rng.Float64()) * math.Atanh(MaxSpin))
		x0, phase := -40-200*rng.Float64(), 2*math.Pi*rng.Float64()
		law, parity := constantLaw(1), Parity(i/2%2)
		if i%4 == 3 {
			law = boltzmannLaw(spin, 1e4*math.Pow(1-spin, 2))
		}
		omega, growing := fastestGrowth(t, l, l, parity, spin, x0, phase, law)
		turn := float64(l) * HorizonFrequency(spin)

		// Every mode from a scan fine enough to follow the phase.
		steps := int(20 * turn * math.Abs(x0))
		width := turn / float64(steps)
		var last complex128
		var turns, fastest float64 // turns counts 2π of arg q
		for j := 1; j < steps; j++ {
			q := roundTrip(t, l, l, parity, spin, x0, phase, width*float64(j), law)
			if j == 1 {
				last, turns = q, cmplx.Phase(q)/(2*math.Pi)
				continue
			}
			d := cmplx.Phase(q/last) / (2 * math.Pi)
			if n := math.Floor(turns + d); n > turns {
				f := (n - turns) / d
				fastest = max(fastest, ((1-f)*math.Log(cmplx.Abs(last))+f*math.Log(cmplx.Abs(q)))*width/(2*math.Pi*d))
			}
			turns += d
			last = q
		}
		// The estimate neglects how |q| and τ change over Im ω and over a step.
		if off := math.Abs(imag(omega) - fastest); off > 0.03*fastest {
			t.Errorf("(%d,%d) spin %.4f surface at %.1f: Im ω = %.4g, first estimate of all modes %.4g", l, l, spin, x0, imag(omega), fastest)
		}
		if !growing {
			continue
		}

		// Zeros of 1 - q by its winding around boxes above and around Im ω.
		b, _, err := loopBand(l, l, spin)
		if err != nil {
			t.Fatal(err)
		}
		g, err := gainTables[l][l]()
		if err != nil {
			t.Fatal(err)
		}
		b.setPhase(g, parity)
		c := cavity{band: &b, x0: x0, phase: phase, side: 1, reflectivity: law}
		one := func(w complex128) complex128 {
			lnq, _ := c.lnQ(w)
			return 1 - cmplx.Exp(lnq)
		}
		zeros := func(low, high float64) int {
			left, right := 1e-3*turn, (1-1e-6)*turn
			n := 10 * (2 + int(turn*math.Abs(x0))) // steps within which q cannot turn unseen
			corners := []complex128{complex(left, low), complex(right, low), complex(right, high), complex(left, high), complex(left, low)}
			winding := 0.0
			for side := range 4 {
				step := (corners[side+1] - corners[side]) / complex(float64(n), 0)
				for j := range n {
					from := corners[side] + step*complex(float64(j), 0)
					winding += turned(one, from, from+step, one(from), one(from+step), 40)
				}
			}
			return int(math.Round(winding / (2 * math.Pi)))
		}
		im := imag(omega)
		if n := zeros(im*1.0001, im*4); n != 0 {
			t.Errorf("(%d,%d) spin %.4f surface at %.1f: %d modes grow faster than Im ω = %.4g", l, l, spin, x0, n, im)
		}
		if n := zeros(im*0.9999, im*4); n < 1 {
			t.Errorf("(%d,%d) spin %.4f surface at %.1f: no zero of 1 - q at ω = %.6g", l, l, spin, x0, omega)
		}
		if size := cmplx.Abs(one(omega)); size > 1e-10 {
			t.Errorf("(%d,%d) spin %.4f surface at %.1f: |1 - q| = %.1e at ω", l, l, spin, x0, size)
		}
		// The same with R continued from direct responses by a polynomial.
		if size := cmplx.Abs(1 - continued(t, l, parity, spin, x0, phase, omega, law)); size > 1e-6 {
			t.Errorf("(%d,%d) spin %.4f surface at %.1f: |1 - q| = %.1e with direct responses", l, l, spin, x0, size)
		}
		mirrored, _ := fastestGrowth(t, l, -l, parity, spin, x0, -phase, func(k float64) float64 { return law(-k) })
		if mirrored != -cmplx.Conj(omega) {
			t.Errorf("(%d,%d) spin %.4f: %g for m = -%d, want mirrored %g", l, l, spin, mirrored, l, omega)
		}
	}
}

// turned is by how much arg f turns from a to b, in radians.
func turned(f func(complex128) complex128, a, b, fa, fb complex128, depth int) float64 {
	middle := (a + b) / 2
	fm := f(middle)
	d, e := cmplx.Phase(fm/fa), cmplx.Phase(fb/fm)
	if math.Abs(d)+math.Abs(e) < 0.7 || depth == 0 {
		return d + e
	}
	return turned(f, a, middle, fa, fm, depth-1) + turned(f, middle, b, fm, fb, depth-1)
}

// TestGrowingByWinding counts the modes that grow with no continuation at all. Rs = 1
// and R are analytic above the real axis, and q vanishes far up, so that 1 - q has
// as many zeros there as it winds around 0 along the real axis.
func TestGrowingByWinding(t *testing.T) {
	rng := random.New(17, "winding")
	grew := 0
	for i := range 24 {
		spin := []float64{0.6, 0.9, 0.98, MaxSpin}[i%4]
		x0, phase := -5/SurfaceGravity(spin)*rng.Float64()-2, 2*math.Pi*rng.Float64()
		omega, growing, err := FastestGrowth(2, 2, Odd, spin, x0, phase, constantLaw(1))
		f := func(w complex128) complex128 {
			return 1 - roundTrip(t, 2, 2, Odd, spin, x0, phase, real(w), constantLaw(1))
		}
		const edge = 1.6 // |R| < 1e-6 beyond
		n := 40 + int(4*math.Abs(x0))
		winding := 0.0
		for j := range n {
			a, b := complex(edge*(2*float64(j)/float64(n)-1), 0), complex(edge*(2*float64(j+1)/float64(n)-1), 0)
			winding += turned(f, a, b, f(a), f(b), 25)
		}
		zeros := int(math.Round(winding / (2 * math.Pi)))
		switch {
		case err != nil && x0 > -2/SurfaceGravity(spin):
			t.Logf("spin %g surface at %.2f: %d growing modes; %v", spin, x0, zeros, err) // grows too fast
		case err != nil:
			t.Errorf("spin %g surface at %.2f: %v", spin, x0, err)
		case growing != (zeros > 0):
			t.Errorf("spin %g surface at %.2f phase %.3f: ω = %g, and %d growing modes", spin, x0, phase, omega, zeros)
		case growing:
			grew++
		}
	}
	if grew < 12 {
		t.Errorf("%d of 24 cavities unstable, want at least 12 for the test to say something", grew)
	}
}

// continued is q of l = m at complex ω: a polynomial through direct responses at real
// ω, and the law's logarithm along a straight line.
func continued(t *testing.T, l int, parity Parity, spin, x0, phase float64, omega complex128, law func(float64) float64) complex128 {
	const n = 15
	turn := float64(l) * HorizonFrequency(spin)
	width := min(0.6*SurfaceGravity(spin), turn/2)
	centre := min(max(real(omega), width), turn)
	var top, bottom complex128
	for j := range n {
		angle := (float64(j) + 0.5) * math.Pi / n
		w := centre + width*math.Cos(angle)
		res, err := BarrierResponse(l, l, spin, w, parity)
		if err != nil {
			t.Fatal(err)
		}
		weight := complex(math.Sin(angle), 0) / (omega - complex(w, 0))
		if j%2 == 1 {
			weight = -weight
		}
		top += weight * res.Reflection
		bottom += weight
	}
	k := real(omega) - turn
	slope := (math.Log(law(k*1.001)) - math.Log(law(k*0.999))) / (0.002 * k)
	rs := cmplx.Exp(complex(math.Log(law(k)), phase) + complex(0, slope*imag(omega)))
	return top / bottom * rs * cmplx.Exp(complex(0, -2*x0)*(omega-complex(turn, 0)))
}

// TestGrowthStartsAtTheStableReflectivity: where a mode sits at the frequency of the
// largest |R|, it grows as soon as Rs exceeds 1/max|R|. Between two modes the
// threshold is higher, and the condition at every frequency is the careful one.
func TestGrowthStartsAtTheStableReflectivity(t *testing.T) {
	for _, spin := range []float64{0.5, 0.7, 0.9, 0.99} {
		stable, err := MaxStableReflectivity(2, 2, spin)
		if err != nil {
			t.Fatal(err)
		}
		gain, peak, err := SuperradiantGain(2, 2, spin)
		if err != nil {
			t.Fatal(err)
		}
		const x0 = -30
		on := -cmplx.Phase(roundTrip(t, 2, 2, Odd, spin, x0, 0, peak, constantLaw(1)))
		between := on + math.Pi
		for _, margin := range []float64{1e-4, 1e-5} {
			over, under := constantLaw(stable*(1+margin*gain)), constantLaw(stable*(1-margin*gain))
			if _, growing := fastestGrowth(t, 2, 2, Odd, spin, x0, on, over); !growing {
				t.Errorf("spin %g: stable at 1%+g |R|²-1 above the limit, with a mode at the peak", spin, margin)
			}
			if _, growing := fastestGrowth(t, 2, 2, Odd, spin, x0, on, under); growing {
				t.Errorf("spin %g: growing %g |R|²-1 below the limit", spin, margin)
			}
			if _, growing := fastestGrowth(t, 2, 2, Odd, spin, x0, between, over); growing {
				t.Errorf("spin %g: growing just above the limit, with no mode near the peak", spin)
			}
			if loop, _ := maxLoop(t, 2, 2, spin, over); !(loop > 1) {
				t.Errorf("spin %g: loop gain 1%+.1e above the limit", spin, loop-1)
			}
		}
	}
}

func TestFastestGrowthStable(t *testing.T) {
	for _, tc := range []struct {
		why       string
		l, m      int
		spin, x0  float64
		law       func(float64) float64
		wantError bool
	}{
		{"no spin", 2, 2, 0, -400, constantLaw(1), false},
		{"no band", 2, 0, 0.9, -400, constantLaw(1), false},
		{"no reflection", 2, 2, 0.9, -400, constantLaw(0), false},
		{"Hawking temperature", 2, 2, 0.9, -400, boltzmannLaw(0.9, 1), false},
		{"Hawking temperature at the largest spin", 2, 2, MaxSpin, -4000, boltzmannLaw(MaxSpin, 1), false},
		{"a cavity without length", 2, 2, 0.9, 30, constantLaw(1), true},
		{"no number", 2, 2, 0.9, math.NaN(), constantLaw(1), true},
		{"infinite", 2, 2, 0.9, math.Inf(-1), constantLaw(1), true},
	} {
		omega, growing, err := FastestGrowth(tc.l, tc.m, Odd, tc.spin, tc.x0, 0.4, tc.law)
		if growing || omega != 0 || (err != nil) != tc.wantError {
			t.Errorf("%s: ω = %g, growing %v, error %v", tc.why, omega, growing, err)
		}
	}
	// A law that ends in the middle of the band, below the fastest mode.
	all, _ := fastestGrowth(t, 2, 2, Odd, 0.9, -400, 0.4, constantLaw(1))
	upper, _ := fastestGrowth(t, 2, 2, Odd, 0.9, -400, 0.4, func(k float64) float64 {
		if k < -0.2 {
			return 0
		}
		return 1
	})
	if all != upper || all == 0 {
		t.Errorf("ω = %g with reflection at |k| < 0.2 only, want %g", upper, all)
	}
	if _, _, err := FastestGrowth(2, 2, 5, 0.9, -400, 0, constantLaw(1)); err == nil {
		t.Error("parity 5: no error")
	}
	law := constantLaw(1)
	if n := testing.AllocsPerRun(20, func() { fastestGrowth(t, 2, 2, Odd, 0.7, -400, 0, law) }); n != 0 {
		t.Errorf("%g allocations, want 0", n)
	}
}

// TestFastestGrowthAnywhere: no error and no NaN wherever a cavity has a length.
func TestFastestGrowthAnywhere(t *testing.T) {
	rng := random.New(13, "growth anywhere")
	for range 1500 {
		l := 2 + rng.IntN(3)
		m := rng.IntN(2*l+1) - l
		spin := math.Tanh(rng.Float64() * math.Atanh(MaxSpin))
		// Proper distances from a Planck length to that of a light ring.
		lnDistance := -90 * rng.Float64()
		law := constantLaw(rng.Float64())
		switch rng.IntN(4) {
		case 0:
			law = boltzmannLaw(spin, math.Exp(8*rng.Float64()-2))
		case 1:
			law = constantLaw(1)
		case 2:
			width := 0.5 * rng.Float64()
			law = func(k float64) float64 { return 1 / (1 + k*k/(width*width)) }
		}
		x0 := SurfaceTortoise(spin, lnDistance)
		omega, growing, err := FastestGrowth(l, m, Odd, spin, x0, 6*rng.Float64(), law)
		if x0 < -10 && err != nil || cmplx.IsNaN(omega) {
			t.Errorf("(%d,%d) spin %.5f surface at %.3f: ω = %g, error %v", l, m, spin, x0, omega, err)
		}
		if loop, _ := maxLoop(t, l, m, spin, law); growing && loop < 1 {
			t.Errorf("(%d,%d) spin %.5f surface at %.3f: ω = %g grows with loop gain %g", l, m, spin, x0, omega, loop)
		}
	}
}
