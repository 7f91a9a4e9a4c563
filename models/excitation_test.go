package models

import (
	"fmt"
	"math"
	"math/cmplx"
	"strings"
	"testing"

	"knell/internal/checktable"
	"knell/internal/constants"
	"knell/models/kerr"
)

// namedTheta puts named values in a model's order; what is not named takes its
// default.
func namedTheta(t testing.TB, m Model, values map[string]float64) []float64 {
	t.Helper()
	theta := make([]float64, len(m.Parameters()))
	for i, p := range m.Parameters() {
		v, ok := values[p.Name]
		if !ok && !p.HasDefault {
			t.Fatalf("no value of %s", p.Name)
		}
		if !ok {
			v = p.Default
		}
		theta[i] = v
	}
	return theta
}

// written computes a cavity's polarisations at one frequency from the definitions,
// term by term with each term's arrival, from the directly integrated barrier and
// the solved modes.
type written struct {
	s      Settings
	values map[string]float64
	rs     func(k float64) float64 // the surface's reflectivity, in units of M
}

func (w written) at(t *testing.T, f float64) (plus, cross complex128) {
	t.Helper()
	v := w.values
	mass, spin := v["mass"], v["spin"]
	scale := mass * constants.SolarMassSeconds
	ln := v["offset"]*math.Ln10 + math.Log(constants.PlanckLength/(mass*constants.SolarMassMetres))
	x0, xb := kerr.SurfaceTortoise(spin, ln), kerr.Tortoise(spin, kerr.LightRing(spin))
	delay := 2 * (xb - x0)
	span := (w.s.Length - (v["start_time"] - w.s.Start)) / scale
	parity := kerr.Odd
	if w.s.Parity == "even" {
		parity = kerr.Even
	}
	for i, label := range w.s.Modes {
		l, m, n, err := ParseMode(label)
		if err != nil {
			t.Fatal(err)
		}
		name := strings.NewReplacer(",", "", "-", "m").Replace(label)
		mode, err := kerr.QuasiNormalMode(l, m, n, spin)
		if err != nil {
			t.Fatal(err)
		}
		gamma := complex(spin, 0) * mode.Omega
		north, err := kerr.Spheroidal(l, m, gamma, w.s.Inclination)
		if err != nil {
			t.Fatal(err)
		}
		south, err := kerr.Spheroidal(l, m, gamma, math.Pi-w.s.Inclination)
		if err != nil {
			t.Fatal(err)
		}
		// Transform of e(t), in s, at one M omega.
		transform := func(omega float64) (ringing, pulse complex128) {
			r, err := kerr.BarrierResponse(l, m, spin, omega, parity)
			if err != nil {
				t.Fatal(err)
			}
			k := omega - float64(m)*kerr.HorizonFrequency(spin)
			rs := cmplx.Rect(w.rs(k), v["echo_phase"])
			q := r.Reflection * rs * cmplx.Exp(complex(0, -2*k*x0))
			sum := func(factor complex128, first float64) (total complex128) {
				for n := 0; first+float64(n)*delay <= span; n++ {
					total += factor
					factor *= q
				}
				return total
			}
			ringing = complex(0, scale) / (complex(omega, 0) - mode.Omega)
			switch w.s.Excitation {
			case "", "barrier":
				ringing *= sum(1, 0)
			case "source":
				xs := xb - v["source_depth"]*(xb-x0)
				ringing *= sum(1, 0) + sum(rs*cmplx.Exp(complex(0, -2*k*(x0-xs))), 2*(xs-x0))
			case "infall":
				if i > 0 {
					break
				}
				width := v["infall_width"] / scale
				carrier := v["infall_carrier"] * real(mode.Omega)
				z := width * scale * math.Sqrt(2*math.Pi) * math.Exp(-math.Pow((omega-carrier)*width, 2)/2)
				late := cmplx.Exp(complex(0, 4*omega*width+2*k*xb))
				pulse = complex(z, 0) * late * sum(r.Transmission*rs*cmplx.Exp(complex(0, -2*k*x0)), delay)
			}
			return ringing, pulse
		}
		omega := 2 * math.Pi * f * scale
		aheadR, aheadP := transform(omega)
		behindR, behindP := transform(-omega)
		c := cmplx.Rect(v["amplitude_"+name], v["phase_"+name])
		d := cmplx.Rect(v["infall_amplitude"], v["infall_phase"])
		ahead, behind := c*aheadR+d*aheadP, c*behindR+d*behindP
		p, x := north+south, 1i*(north-south)
		plus += (p*behind + cmplx.Conj(p*ahead)) / 2
		cross += (x*behind + cmplx.Conj(x*ahead)) / 2
	}
	turn := cmplx.Exp(complex(0, -2*math.Pi*f*(v["start_time"]-w.s.Start)))
	return plus * turn, cross * turn
}

// Every excitation against its definition, for modes of several (l, m) at both
// parities.
func TestPhysicsExcitations(t *testing.T) {
	table := checktable.New(t, "cavity's spectrum against the sum of its terms that arrive in time, largest difference over the largest value")
	// Up to M omega = 1.9.
	grid := Grid{First: 20, Count: 1780, Step: 0.5}
	const spin, corner = 0.69, 3.0
	laws := map[string]struct {
		law map[string]float64
		rs  func(k float64) float64
	}{
		"constant":  {map[string]float64{"reflectivity": 0.6}, func(float64) float64 { return 0.6 }},
		"boltzmann": {map[string]float64{"temperature": 1.4}, func(k float64) float64 { return math.Exp(-math.Abs(k) / (2.8 * kerr.HawkingTemperature(spin))) }},
		"power": {map[string]float64{"reflectivity": 0.9, "corner": corner, "exponent": 1.5}, func(k float64) float64 {
			return 0.9 * math.Pow(1+math.Abs(k)/(corner*kerr.HawkingTemperature(spin)), -1.5)
		}},
	}
	for _, tc := range []struct {
		excitation, law, parity string
		modes                   []string
		length, start           float64
		more                    map[string]float64
		nothing                 bool // no echo arrives
	}{
		{"barrier", "constant", "", []string{"2,2,0"}, 1.7, 0, nil, false},
		{"barrier", "power", "even", []string{"2,2,0", "2,2,1"}, 0.8, 0, nil, false},
		{"barrier", "boltzmann", "odd", []string{"2,2,0", "3,3,0", "2,2,1", "2,1,0"}, 1.1, 0.01, nil, false},
		{"barrier", "constant", "even", []string{"2,0,0", "2,-2,0"}, 1.1, 0, nil, false},
		{"source", "constant", "", []string{"2,2,0"}, 1.1, 0, map[string]float64{"source_depth": 0}, false},
		{"source", "boltzmann", "", []string{"2,2,0"}, 1.1, 0.01, map[string]float64{"source_depth": 0.3}, false},
		{"source", "constant", "even", []string{"2,2,0", "2,-1,0"}, 1.1, 0, map[string]float64{"source_depth": 0.9}, false},
		{"source", "power", "", []string{"2,2,0"}, 0.2, 0, map[string]float64{"source_depth": 0.2}, true},
		{"source", "power", "", []string{"2,2,0"}, 0.2, 0, map[string]float64{"source_depth": 0.5}, false},
		{"source", "power", "", []string{"2,2,0"}, 0.2, 0, map[string]float64{"source_depth": 1}, false},
		{"infall", "constant", "", []string{"2,2,0"}, 1.1, 0, map[string]float64{"infall_amplitude": 0.9, "infall_phase": 2, "infall_width": 0.002}, false},
		{"infall", "boltzmann", "even", []string{"2,2,0", "2,2,1"}, 1.1, 0.01, map[string]float64{"infall_amplitude": 0.9, "infall_phase": 2, "infall_width": 0.002, "infall_carrier": 0.6}, false},
		{"infall", "power", "", []string{"3,3,0", "2,2,0"}, 0.8, 0, map[string]float64{"infall_amplitude": 0.9, "infall_phase": 2, "infall_width": 0.0005, "infall_carrier": 0}, false},
		{"infall", "constant", "", []string{"2,-2,0"}, 0.8, 0, map[string]float64{"infall_amplitude": 0.9, "infall_phase": 2, "infall_width": 0.05}, false},
	} {
		t.Run(tc.excitation+" "+tc.law+" "+strings.Join(tc.modes, " "), func(t *testing.T) {
			s := Settings{Model: "cavity", Modes: tc.modes, Reflectivity: tc.law, Parity: tc.parity, Excitation: tc.excitation, Grid: grid, Inclination: 0.6, Length: tc.length}
			values := map[string]float64{"mass": 68, "spin": spin, "start_time": tc.start, "offset": 0, "echo_phase": 0.4, "reflectivity": 1,
				"amplitude_220": 1, "phase_220": 1.1, "amplitude_221": 0.9, "phase_221": 3, "amplitude_330": 0.7, "phase_330": 0.2,
				"amplitude_210": 0.5, "phase_210": 5, "amplitude_200": 1, "phase_200": 4, "amplitude_2m20": 0.8, "phase_2m20": 1, "amplitude_2m10": 0.8, "phase_2m10": 1}
			for _, more := range []map[string]float64{laws[tc.law].law, tc.more} {
				for name, v := range more {
					values[name] = v
				}
			}
			if _, ok := values["infall_carrier"]; !ok {
				values["infall_carrier"] = 1
			}
			model := newTestModel(t, s)
			h := fill(t, model, namedTheta(t, model, values), grid.Count)
			largest := 0.0
			for j := range grid.Count {
				largest = max(largest, math.Hypot(h.PlusRe[j], h.PlusIm[j]), math.Hypot(h.CrossRe[j], h.CrossIm[j]))
			}
			w := written{s: s, values: values, rs: laws[tc.law].rs}
			worst, apart := 0.0, 0.0
			horizon := fill(t, newTestModel(t, Settings{Model: "ringdown", Modes: tc.modes, Grid: grid, Inclination: 0.6}), namedTheta(t, model, values)[:3+2*len(tc.modes)], grid.Count)
			for _, j := range []int{0, 7, 200, 275, 391, 467, 500, 650, 801, 1200, 1779} {
				plus, cross := w.at(t, grid.Frequency(j))
				d := max(cmplx.Abs(plus-complex(h.PlusRe[j], h.PlusIm[j])), cmplx.Abs(cross-complex(h.CrossRe[j], h.CrossIm[j]))) / largest
				worst = max(worst, d)
				apart = max(apart, cmplx.Abs(plus-complex(horizon.PlusRe[j], horizon.PlusIm[j]))/largest)
			}
			// An error in R of 1e-9 times the number of echoes squared, 25 at most.
			// A short pulse also has something beyond the barrier's table.
			tolerance := 2.5e-8
			if tc.more["infall_width"] == 0.0005 {
				tolerance = 5e-6
			}
			name := fmt.Sprintf("%s, %s, %s", tc.excitation, tc.law, strings.Join(tc.modes, " "))
			if depth, ok := tc.more["source_depth"]; ok {
				name += fmt.Sprintf(", depth %g", depth)
			}
			table.Worst(name, worst, tolerance, "terms from BarrierResponse and QuasiNormalMode")
			if (apart < 1e-3) != tc.nothing {
				t.Errorf("%.2g of the largest value from the ringdown", apart)
			}
		})
	}
}

// The limits that excitation_source.go states.
func TestSourceLimits(t *testing.T) {
	s := Settings{Model: "cavity", Modes: []string{"2,2,0"}, Reflectivity: "constant", Grid: Grid{First: 60, Count: 1500, Step: 0.5}, Inclination: 0.6, Length: 1.4}
	values := map[string]float64{"mass": 68, "spin": 0.69, "amplitude_220": 1e-21, "phase_220": 1.1, "offset": 0, "echo_phase": 0.4, "reflectivity": 0.5, "source_depth": 1}
	m := newTestModel(t, s)
	factor := 1 + cmplx.Rect(0.5, 0.4)
	values["amplitude_220"] *= cmplx.Abs(factor)
	values["phase_220"] += cmplx.Phase(factor)
	want := fill(t, m, namedTheta(t, m, values), s.Grid.Count)
	values["amplitude_220"], values["phase_220"] = 1e-21, 1.1
	s.Excitation = "source"
	m = newTestModel(t, s)
	got := fill(t, m, namedTheta(t, m, values), s.Grid.Count)
	largest := 0.0
	for _, v := range want.PlusRe {
		largest = max(largest, math.Abs(v))
	}
	for j := range want.PlusRe {
		// The barrier's sum is cut where |R| < 1e-8.
		if d := math.Abs(got.PlusRe[j]-want.PlusRe[j]) + math.Abs(got.CrossIm[j]-want.CrossIm[j]); d > 2e-8*largest {
			t.Fatalf("a source at the surface: off by %.2g of the largest value at bin %d", d/largest, j)
		}
	}
	// With Rs = -1 the two waves cancel.
	values["echo_phase"], values["reflectivity"] = math.Pi, 1
	got = fill(t, m, namedTheta(t, m, values), s.Grid.Count)
	for j := range got.PlusRe {
		if math.Abs(got.PlusRe[j]) > 1e-13*largest*1e3 {
			t.Fatalf("a source at a surface of Rs = -1 leaves %g at bin %d", got.PlusRe[j], j)
		}
	}
}

// What falls in as an echo's own pulse comes out as its echo: with z = h_H R / T
// the infall's K z is the barrier excitation's echoes.
func TestTransferIsTheEchoSum(t *testing.T) {
	grid := Grid{First: 60, Count: 1500, Step: 0.5}
	s := Settings{Model: "cavity", Modes: []string{"2,2,0"}, Reflectivity: "constant", Excitation: "infall", Grid: grid, Length: 1.4}
	c := newTestModel(t, s).(*Cavity)
	values := map[string]float64{"mass": 68, "spin": 0.69, "amplitude_220": 1e-21, "phase_220": 1.1, "offset": 0, "echo_phase": 0.4, "reflectivity": 0.5,
		"infall_amplitude": 1, "infall_phase": 0, "infall_width": 0.0004}
	p := c.place(namedTheta(t, c, values), 0)
	g := &c.groups[0]
	if _, err := c.fillSums(g, p); err != nil {
		t.Fatal(err)
	}
	sumRe, sumIm := append([]float64{}, c.eRe...), append([]float64{}, c.eIm...)
	z := pulse{width: 0.0004 / p.scale, carrier: 0.5, scale: p.scale}
	if err := c.fillInfall(g, p, z, p.step, c.eRe, c.eIm); err != nil {
		t.Fatal(err)
	}
	xb := kerr.Tortoise(p.spin, kerr.LightRing(p.spin))
	for _, j := range []int{0, 100, 400, 500, 700} {
		omega := p.step * float64(grid.First+j)
		r, err := kerr.BarrierResponse(2, 2, p.spin, omega, kerr.Odd)
		if err != nil {
			t.Fatal(err)
		}
		k := omega - 2*p.rotation
		spectrum := z.width * z.scale * math.Sqrt(2*math.Pi) * math.Exp(-math.Pow((omega-z.carrier)*z.width, 2)/2)
		full := complex(spectrum, 0) * cmplx.Exp(complex(0, 4*omega*z.width+2*k*xb))
		got := complex(c.eRe[j], c.eIm[j]) / full * r.Reflection / r.Transmission
		want := complex(sumRe[j], sumIm[j]) - 1
		if d := cmplx.Abs(got - want); d > 1e-5*cmplx.Abs(want) {
			t.Errorf("K R/T = %v at M omega = %.3f, want the echo sum less one, %v", got, omega, want)
		}
	}
}

// Beyond the table the transmission is continued; kerr answers there directly, up
// to kerr.MaxFrequency.
func TestTransmissionBeyondTheTable(t *testing.T) {
	for _, spin := range []float64{0, 0.69, 0.95} {
		groups, err := newGroups([]modeLabel{{2, 2, 0, "220"}}, kerr.Odd)
		if err != nil {
			t.Fatal(err)
		}
		g := &groups[0]
		if err := g.setSpin(spin); err != nil {
			t.Fatal(err)
		}
		_, edge := g.barrier.Range()
		re, im := make([]float64, 400), make([]float64, 400)
		for _, step := range []float64{kerr.MaxFrequency / 400, -kerr.MaxFrequency / 400} {
			if err := fillTransmission(g, 2*kerr.HorizonFrequency(spin), step, step, re, im); err != nil {
				t.Fatal(err)
			}
			inside, beyond := 0.0, 0.0
			for j := range re {
				omega := step * float64(1+j)
				want, err := kerr.BarrierResponse(2, 2, spin, omega, kerr.Odd)
				if err != nil {
					t.Fatal(err)
				}
				d := cmplx.Abs(complex(re[j], im[j]) - want.Transmission)
				if math.Abs(omega) <= edge {
					inside = max(inside, d)
				} else {
					beyond = max(beyond, d)
				}
			}
			t.Logf("spin %g, step %g: inside %.1e, beyond %.1e", spin, step, inside, beyond)
			if inside > 1e-6 {
				t.Errorf("spin %g: T off by %.2g inside the table", spin, inside)
			}
			// As fillTransmission states; without a slope the phase would be off by
			// up to 0.3 rad.
			if beyond > 0.1 {
				t.Errorf("spin %g: T off by %.2g beyond the table", spin, beyond)
			}
		}
	}
}
