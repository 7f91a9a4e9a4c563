package priors

import (
	"errors"
	"fmt"
	"math"
	"testing"

	"gonum.org/v1/gonum/integrate/quad"
)

// must returns the prior of a constructor that has to succeed.
func must[P Prior](p P, err error) Prior {
	if err != nil {
		panic(err)
	}
	return p
}

// same reports whether got is want to a relative tolerance; zero and an infinity equal
// only themselves.
func same(got, want, relTol float64) bool {
	if math.IsInf(want, 0) || want == 0 {
		return got == want
	}
	return math.Abs(got-want) <= relTol*math.Abs(want)
}

func TestQuantileAndLogDensity(t *testing.T) {
	// want: mpmath at 40 digits, quantile by inverting the closed-form distribution
	// and ln p from the closed-form density there.
	// Tolerances are relative: a few roundings of 1e-16, times 1/(1-u) where u near one
	// is given to 1e-16 only, times z^2 for the density of a tail at z sigma.
	// Logarithms smaller than one are compared to that as absolute numbers.
	for _, tc := range []struct {
		why           string
		prior         Prior
		u, x, density float64
		xTol, dTol    float64
	}{
		{"plain", must(NewUniform(-3, 5)), 0.25, -1, -math.Ln2 * 3, 1e-15, 1e-15},
		{"log-uniform, middle decade", must(NewLogUniform(1, 10)), 0.5, 3.162277660168379332, -1.9853249917449786418, 1e-15, 1e-15},
		{"volume-like", must(NewPower(10, 1000, 2)), 0.25, 629.96115490733157035, -6.7333362310631211002, 1e-15, 1e-15},
		{"from zero, small u", must(NewPower(0, 1, 2)), 1e-12, 1e-4, -17.322068455284255781, 2e-15, 1e-15},
		{"steep, upper end", must(NewPower(1e-3, 5, -2.35)), 0.999, 0.16556831354166709864, -4.799182098975402196, 2e-13, 2e-13}, // 1-u has lost three digits
		{"large exponent", must(NewPower(2, 3, 400)), 0.001, 2.948763607147035866, -1.9951798179522009066, 1e-14, 2e-13},
		{"nearly uniform", must(NewPower(2, 3, 1e-12)), 0.5, 2.5000000000000503388, 6.7482269897299512075e-15, 1e-15, 1e-15},
		{"nearly log-uniform", must(NewPower(1, 10, -1.0000000001)), 0.3, 1.9952623148578034876, -1.524807973044447873, 1e-15, 1e-15},
		{"normal, far tail", must(NewNormal(0, 1)), 1e-300, -37.047096299361199237, math.NaN(), 1e-15, 0},
		{"normal, tail", must(NewNormal(0, 1)), 1e-20, -9.2623400897984075737, math.NaN(), 1e-15, 0},
		{"normal, moved", must(NewNormal(10, 2)), 0.3, 10 - 2*0.52440051270804078404, math.NaN(), 1e-15, 0},
		{"upper tail by survival", must(NewTruncatedNormal(0, 1, 8, 9)), 0.5, 8.0848888990181664333, 1.4119658054988856801, 1e-15, 1e-13},
		{"upper tail's far end", must(NewTruncatedNormal(0, 1, 8, 9)), 0.999, 8.7919635866188912158, -4.5546317939837833554, 1e-14, 1e-13},
		{"lower tail", must(NewTruncatedNormal(0, 1, -9, -8)), 0.001, -8.7919635866188912158, -4.5546317939837833554, 1e-14, 1e-13},
		{"20 sigma out", must(NewTruncatedNormal(0, 1, 20, 30)), 0.25, 20.014343291896003944, 2.7112481349613053307, 1e-15, 1e-12},
		{"near the smallest float64", must(NewTruncatedNormal(0, 1, 35, 36)), 0.9, 35.065673058436488712, 1.2554492081385349564, 1e-15, 1e-12},
		{"asymmetric cut", must(NewTruncatedNormal(0, 1, -2, 3)), 0.975, 1.9473332527675812228, -2.7905967443169695867, 2e-15, 1e-15},
		{"symmetric cut, near the edge", must(NewTruncatedNormal(0, 1, -1, 1)), 0.0001, -0.99971790256255308969, -1.0369413292545818663, 1e-15, 1e-15},
		{"sine at the pole", must(NewSine(0, math.Pi)), 1e-12, 2.0000000000003333333e-6, -13.815510557964774104, 1e-15, 1e-15},
		{"sine", must(NewSine(0, math.Pi)), 0.75, 2.0943951023931954923, -0.83698821678583577314, 1e-15, 1e-15},
		{"sine, cut", must(NewSine(1, 2)), 0.3, 1.3146364973101931096, 0.011353518032819984127, 1e-15, 1e-13},
		{"sine, near the other pole", must(NewSine(3, 3.1)), 0.9, 3.0819329035705029536, 1.8751136247739387478, 1e-15, 1e-14},
		{"cosine", must(NewCosine(-math.Pi/2, math.Pi/2)), 0.75, 0.52359877559829887308, -0.83698821678583577314, 1e-15, 1e-15},
		{"cosine, cut", must(NewCosine(-0.5, 1)), 0.3, -0.083252719235859116071, -0.2817802087525218234, 5e-15, 1e-14},
		{"known", must(NewFixed(0.3)), 0.7, 0.3, 0, 0, 0},
	} {
		t.Run(tc.why, func(t *testing.T) {
			got := tc.prior.Quantile(tc.u)
			if !same(got, tc.x, tc.xTol) {
				t.Errorf("%v: Quantile(%g) = %.17g, want %.17g", tc.prior, tc.u, got, tc.x)
			}
			if math.IsNaN(tc.density) {
				return
			}
			if got := tc.prior.LogDensity(tc.x); !same(got, tc.density, tc.dTol) && math.Abs(got-tc.density) > tc.dTol {
				t.Errorf("%v: LogDensity(%g) = %.17g, want %.17g", tc.prior, tc.x, got, tc.density)
			}
		})
	}
}

// every holds one or more priors of each family.
var every = []Prior{
	must(NewUniform(-3, 5)),
	must(NewUniform(1e6, 1e6+1)),
	must(NewLogUniform(1e-22, 1e-19)),
	must(NewPower(10, 1000, 2)),
	must(NewPower(0, 7, 0.5)),
	must(NewPower(0, 7, 0)),
	must(NewPower(1e-3, 5, -2.35)),
	must(NewNormal(10, 2)),
	must(NewTruncatedNormal(10, 2, 7, math.Inf(1))),
	must(NewTruncatedNormal(0, 1, 8, 9)),
	must(NewTruncatedNormal(0, 1, -12, -11)),
	must(NewSine(0, math.Pi)),
	must(NewSine(0.3, 1)),
	must(NewCosine(-math.Pi/2, math.Pi/2)),
	must(NewCosine(-1, 0.2)),
}

func TestDensityIsTheQuantilesDerivative(t *testing.T) {
	// The density integrated up to Quantile(u) is u: normalisation (u = 1) and the
	// inverse in one. 400 Gauss-Legendre points; in ln x where the range spans decades.
	// The square root at zero converges slowest, as n^-3.
	const tol = 1e-8
	for _, p := range every {
		t.Run(p.String(), func(t *testing.T) {
			low, high := p.Support()
			if math.IsInf(low, 0) {
				low = p.Quantile(1e-13)
			}
			if math.IsInf(high, 0) {
				high = p.Quantile(1 - 1e-13)
			}
			density := func(x float64) float64 { return math.Exp(p.LogDensity(x)) }
			integrate := func(to float64) float64 {
				if low > 0 && high > 50*low {
					return quad.Fixed(func(y float64) float64 { return density(math.Exp(y)) * math.Exp(y) },
						math.Log(low), math.Log(to), 400, quad.Legendre{}, 1)
				}
				return quad.Fixed(density, low, to, 400, quad.Legendre{}, 1)
			}
			if got := integrate(high); math.Abs(got-1) > tol {
				t.Errorf("integral over the support = %.12f, want 1", got)
			}
			for _, u := range []float64{1e-6, 0.01, 0.1, 0.5, 0.77, 0.99, 0.999999} {
				if got := integrate(p.Quantile(u)); math.Abs(got-u) > tol {
					t.Errorf("integral up to Quantile(%g) = %.12f", u, got)
				}
			}
		})
	}
}

func TestEdgesAndOrder(t *testing.T) {
	for _, p := range every {
		t.Run(p.String(), func(t *testing.T) {
			low, high := p.Support()
			if got := p.Quantile(0); got != low {
				t.Errorf("Quantile(0) = %g, want %g", got, low)
			}
			if got := p.Quantile(1); got != high {
				t.Errorf("Quantile(1) = %g, want %g", got, high)
			}
			for _, u := range []float64{-1e-9, 1 + 1e-9, math.NaN(), math.Inf(1)} {
				if got := p.Quantile(u); !math.IsNaN(got) {
					t.Errorf("Quantile(%g) = %g, want NaN", u, got)
				}
			}
			for _, x := range []float64{math.Nextafter(low, math.Inf(-1)), math.Nextafter(high, math.Inf(1)), math.NaN()} {
				if math.IsInf(x, 0) {
					continue
				}
				if got := p.LogDensity(x); !math.IsInf(got, -1) {
					t.Errorf("LogDensity(%g) = %g, want -Inf", x, got)
				}
			}
			last := low
			for i := range 10001 {
				x := p.Quantile(float64(i) / 10000)
				if !(x >= last) {
					t.Fatalf("Quantile falls from %.17g to %.17g at u = %g", last, x, float64(i)/10000)
				}
				last = x
			}
			if n := testing.AllocsPerRun(100, func() { p.LogDensity(p.Quantile(0.3)) }); n != 0 {
				t.Errorf("%g allocations, want 0", n)
			}
		})
	}
}

func TestConstructorsReject(t *testing.T) {
	nan, inf := math.NaN(), math.Inf(1)
	err := func(_ any, err error) error { return err }
	for _, tc := range []struct {
		key string
		err error
	}{
		{"low", err(NewUniform(2, 1))},
		{"low", err(NewUniform(1, 1))},
		{"low", err(NewUniform(nan, 1))},
		{"high", err(NewUniform(0, inf))},
		{"high", err(NewUniform(-1e308, 1e308))},
		{"low", err(NewLogUniform(0, 1))},
		{"low", err(NewLogUniform(-1, 1))},
		{"low", err(NewLogUniform(3, 1))},
		{"low", err(NewPower(-1, 1, 2))},
		{"low", err(NewPower(0, 1, -1.5))},
		{"exponent", err(NewPower(1, 2, nan))},
		{"sigma", err(NewNormal(0, 0))},
		{"sigma", err(NewNormal(0, -1))},
		{"mean", err(NewNormal(inf, 1))},
		{"low", err(NewTruncatedNormal(0, 1, 2, 1))},
		{"low", err(NewTruncatedNormal(0, 1, nan, 1))},
		{"high", err(NewTruncatedNormal(0, 1, 0, nan))},
		{"low", err(NewTruncatedNormal(0, 1, 40, 41))},
		{"high", err(NewTruncatedNormal(0, 1, -41, -40))},
		{"low", err(NewSine(-0.1, 1))},
		{"high", err(NewSine(0, 3.2))},
		{"high", err(NewCosine(0, 1.6))},
		{"low", err(NewCosine(-1.6, 0))},
		{"value", err(NewFixed(nan))},
	} {
		var field *FieldError
		if !errors.As(tc.err, &field) || field.Key != tc.key || field.Got == "" || field.Want == "" {
			t.Errorf("want a *FieldError for %s, got %v", tc.key, tc.err)
		}
	}
}

func BenchmarkQuantile(b *testing.B) {
	for _, p := range every {
		b.Run(fmt.Sprint(p), func(b *testing.B) {
			b.ReportAllocs()
			u := 0.0
			for b.Loop() {
				u += 0.001
				if u >= 1 {
					u = 0.0005
				}
				p.Quantile(u)
			}
		})
	}
}
