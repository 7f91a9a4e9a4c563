package models

import (
	"fmt"
	"math"
	"math/cmplx"
	"strings"
	"testing"

	"gonum.org/v1/gonum/dsp/fourier"

	"knell/internal/checktable"
	"knell/internal/constants"
	"knell/models/kerr"
)

// echoTrain is a case's first mode, its partner left out, as spectra at every
// frequency of a segment: part n is what the n-th echo adds.
type echoTrain struct {
	c        timeCase
	duration float64
	delay    float64 // s, as the model derives it
	parts    [][]complex128
}

// analytic is the first mode's own complex signal p exp(-i omega t), echoes included,
// of which h+ is the real part. With every phase turned by a right angle h+ is the real
// part of i times that, so the two together hold the whole, at any inclination.
func analytic(t testing.TB, c timeCase, duration, length float64) []complex128 {
	t.Helper()
	c.s.Grid, c.s.Length = timeGrid(duration), length
	m := newTestModel(t, c.s)
	theta := thetaByName(t, m, c.values)
	series := func() []complex128 {
		return seriesThrough(fill(t, m, theta, c.s.Grid.Count), c.s.Grid, c.notch(t))
	}
	z := series()
	for i, p := range m.Parameters() {
		if strings.Contains(p.Name, "phase") && p.Name != "echo_phase" {
			theta[i] += math.Pi / 2
		}
	}
	for i, turned := range series() {
		z[i] = complex(real(z[i]), -real(turned))
	}
	return z
}

// trainOf splits a case's signal into its echoes 0 to last, by the length of the data.
func trainOf(t testing.TB, c timeCase, duration float64, last int) echoTrain {
	t.Helper()
	c.s.Grid, c.s.Length = timeGrid(duration), 1
	m := newTestModel(t, c.s)
	theta := thetaByName(t, m, c.values)
	c.values = map[string]float64{}
	for i, p := range m.Parameters() {
		c.values[p.Name] = theta[i]
	}
	train := echoTrain{c: c, duration: duration, delay: derivedOf(t, m, theta, "echo_delay")}
	// A comb begins with a pulse and a delay, and a train of pulses with the ringdown.
	offset := 0.0
	switch c.s.Model {
	case "comb":
		offset = c.values["comb_delay"]
	case "pulses":
		offset = c.values["pulse_delay"] - train.delay
	}
	var before []complex128
	for n := range last + 1 {
		z := analytic(t, c, duration, offset+(float64(n)+0.5)*train.delay)
		part := make([]complex128, len(z))
		copy(part, z)
		for i := range before {
			part[i] -= before[i]
		}
		before = z
		train.parts = append(train.parts, fourier.NewCmplxFFT(len(part)).Coefficients(nil, part))
	}
	return train
}

func derivedOf(t testing.TB, m Model, theta []float64, name string) float64 {
	t.Helper()
	out := make([]float64, len(m.Derived()))
	if err := m.Derive(theta, out); err != nil {
		t.Fatal(err)
	}
	for i, p := range m.Derived() {
		if p.Name == name {
			return out[i]
		}
	}
	t.Fatalf("the model derives no %s", name)
	return 0
}

// omega is the angular frequency of bin k, rad/s: with exp(-i omega t) it grows
// against the transform's own.
func (e echoTrain) omega(k int) float64 {
	if n := len(e.parts[0]); k > n/2 {
		k -= n
	}
	return -2 * math.Pi * float64(k) / e.duration
}

// published is a law's amplitude at k, in units of M, from its formula; nothing of the
// package's own laws is used.
func published(t testing.TB, c timeCase, k float64) float64 {
	t.Helper()
	v := c.values
	kt := math.Abs(k) / kerr.HawkingTemperature(v["spin"])
	switch c.s.Reflectivity {
	case "constant":
		return v["reflectivity"]
	case "boltzmann": // arXiv:1905.00464
		return v["reflectivity"] * math.Exp(-kt/(2*v["temperature"]))
	case "membrane": // arXiv:2006.14628
		return (1 - v["viscosity"]) / (1 + v["viscosity"])
	case "power":
		return v["reflectivity"] * math.Pow(1+kt/v["corner"], -v["exponent"])
	case "lorentzian":
		return v["reflectivity"] / (1 + math.Pow(kt/v["corner"], 2))
	}
	t.Fatalf("no formula of reflectivity %s", c.s.Reflectivity)
	return 0
}

// bounce is what one round trip does to the wave besides taking the time of
// kerr.EchoDelay: R exp(-2 i k x_b) Rs exp(i phase) exp(-i m Omega_H delay), with x_b
// the light ring, from the barrier's own integration at every bin. Beyond |M omega| =
// 2 the barrier of these cases reflects less than 1e-8.
func (e echoTrain) bounce(t testing.TB) []complex128 {
	t.Helper()
	l, m, _, err := ParseMode(e.c.s.Modes[0])
	if err != nil {
		t.Fatal(err)
	}
	parity := kerr.Odd
	if e.c.s.Parity == "even" {
		parity = kerr.Even
	}
	v := e.c.values
	spin, scale := v["spin"], v["mass"]*constants.SolarMassSeconds
	ring, shift := kerr.Tortoise(spin, kerr.LightRing(spin)), float64(m)*kerr.HorizonFrequency(spin)
	b := make([]complex128, len(e.parts[0]))
	for j := range b {
		w := e.omega(j) * scale
		if math.Abs(w) > kerr.MaxFrequency {
			continue
		}
		r, err := kerr.BarrierResponse(l, m, spin, w, parity)
		if err != nil {
			t.Fatal(err)
		}
		k := w - shift
		b[j] = r.Reflection * cmplx.Rect(published(t, e.c, k), v["echo_phase"]-2*k*ring-shift*e.delay/scale)
	}
	return b
}

// match compares an echo with a prediction that lacks a delay. It returns the lag of
// the best match in samples and the overlap at the predicted delay itself, 1 for the
// same signal with the same amplitude and phase.
func (e echoTrain) match(predicted, echo []complex128, delay float64) (lag int, overlap complex128) {
	n := len(echo)
	cross := make([]complex128, n)
	norm := 0.0
	for j := range cross {
		cross[j] = echo[j] * cmplx.Conj(predicted[j])
		overlap += cross[j] * cmplx.Rect(1, -e.omega(j)*delay)
		norm += real(predicted[j])*real(predicted[j]) + imag(predicted[j])*imag(predicted[j])
	}
	series := fourier.NewCmplxFFT(n).Sequence(nil, cross)
	for i, z := range series {
		if cmplx.Abs(z) > cmplx.Abs(series[lag]) {
			lag = i
		}
	}
	return lag, overlap / complex(norm, 0)
}

// trains are the cases with echoes or pulses of one wave.
func trains(model string) (list []timeCase) {
	for _, c := range timeCases {
		if c.s.Model != model {
			continue
		}
		// One mode at a time.
		values := map[string]float64{}
		for name, v := range c.values {
			if strings.HasPrefix(name, "amplitude_") && name != amplitudeName(c.s.Modes[0]) {
				v = 0
			}
			values[name] = v
		}
		c.values = values
		list = append(list, c)
	}
	return list
}

func amplitudeName(mode string) string {
	return "amplitude_" + strings.NewReplacer(",", "", "-", "m").Replace(mode)
}

// Each echo is the one before it, reflected by barrier and surface, later by the echo
// delay. The lag is found by cross-correlation with that prediction, sample by sample at
// 32768 Hz, 31 us each; the overlap says that shape, amplitude and phase are
// right too.
func TestPhysicsEchoesAtThePredictedDelays(t *testing.T) {
	table := checktable.New(t, "echo n against echo n-1 reflected once more: lag in samples of 1/32768 s, overlap")
	for _, c := range trains("cavity") {
		e := trainOf(t, c, 2, 3)
		bounce := e.bounce(t)
		worst, first := 0.0, 1
		if c.s.Excitation == "infall" {
			first = 2 // part 0 is the ringdown, of which no echo comes
		}
		for n := first; n < len(e.parts); n++ {
			predicted := make([]complex128, len(bounce))
			for j := range predicted {
				predicted[j] = e.parts[n-1][j] * bounce[j]
			}
			lag, overlap := e.match(predicted, e.parts[n], e.delay)
			worst = max(worst, cmplx.Abs(overlap-1))
			table.Absolute(fmt.Sprintf("%s, echo %d: lag", c.name, n), float64(lag), e.delay*timeRate, 1, "light ring to surface and back")
		}
		// The table of the barrier is good to 2e-7 or better.
		table.Worst(c.name+": overlap less 1", worst, 1e-6, "barrier integrated at each frequency")
	}
}

// A source in the cavity sends a second wave after the first, by way of the surface:
// the ringdown times Rs exp(i phase) at k, later by twice the tortoise distance between
// source and surface, the depth's complement of a delay.
func TestPhysicsSourcesSecondWave(t *testing.T) {
	table := checktable.New(t, "the wave by way of the surface against the ringdown: lag in samples of 1/32768 s, overlap")
	for _, c := range trains("cavity") {
		if c.s.Excitation != "source" {
			continue
		}
		e := trainOf(t, c, 2, 0) // half a delay: no echo, but the second wave
		bare := c
		bare.s = Settings{Model: "ringdown", Modes: c.s.Modes, Inclination: c.s.Inclination}
		bare.values = remnant(nil)
		first := analytic(t, bare, 2, 1)
		fft := fourier.NewCmplxFFT(len(first))
		first = fft.Coefficients(nil, first)
		lag := (1 - c.values["source_depth"]) * e.delay
		scale := c.values["mass"] * constants.SolarMassSeconds
		shift := 2 * kerr.HorizonFrequency(c.values["spin"])
		second, predicted := make([]complex128, len(first)), make([]complex128, len(first))
		for j := range first {
			second[j] = e.parts[0][j] - first[j]
			predicted[j] = first[j] * cmplx.Rect(published(t, e.c, e.omega(j)*scale-shift), c.values["echo_phase"]-shift*lag/scale)
		}
		at, overlap := e.match(predicted, second, lag)
		table.Absolute(c.name+": lag", float64(at), lag*timeRate, 1, "source to surface and back")
		table.Complex(c.name+": overlap", overlap, 1, 1e-9, "law of the surface, no barrier in it")
	}
}

// What comes out first of an infalling pulse: the Gaussian of its parameters, sampled in
// time, through the barrier and once off the surface. Its centre passes the light ring
// infallLead widths after the start.
func TestPhysicsInfallingPulse(t *testing.T) {
	table := checktable.New(t, "first pulse out of the cavity against the infalling one, transmitted and reflected: lag in samples of 1/32768 s, overlap")
	for _, c := range trains("cavity") {
		if c.s.Excitation != "infall" {
			continue
		}
		const duration = 2.0
		e := trainOf(t, c, duration, 1)
		v := e.c.values
		spin, scale := v["spin"], v["mass"]*constants.SolarMassSeconds
		mode, err := kerr.QuasiNormalMode(2, 2, 0, spin)
		if err != nil {
			t.Fatal(err)
		}
		angular := complex128(0)
		for _, theta := range []float64{c.s.Inclination, math.Pi - c.s.Inclination} {
			s, err := kerr.Spheroidal(2, 2, complex(spin, 0)*mode.Omega, theta)
			if err != nil {
				t.Fatal(err)
			}
			angular += s
		}
		n := len(e.parts[0])
		series := make([]complex128, n)
		filter := e.c.notch(t)
		for i := range series {
			x := float64(i)/timeRate - infallLead*v["infall_width"]
			if i > n/2 {
				x -= duration
			}
			envelope := v["infall_amplitude"] * math.Exp(-math.Pow(x/v["infall_width"], 2)/2)
			series[i] = angular * cmplx.Rect(envelope, v["infall_phase"]-v["infall_carrier"]*real(mode.Omega)/scale*x)
		}
		predicted := fourier.NewCmplxFFT(n).Coefficients(nil, series)
		shift := 2 * kerr.HorizonFrequency(spin)
		for j := range predicted {
			w := e.omega(j) * scale
			if math.Abs(w) > 1.9 {
				predicted[j] = 0 // more than six deviations off the carrier
				continue
			}
			r, err := kerr.BarrierResponse(2, 2, spin, w, kerr.Odd)
			if err != nil {
				t.Fatal(err)
			}
			predicted[j] *= filter(-e.omega(j)/(2*math.Pi)) * r.Transmission *
				cmplx.Rect(published(t, e.c, w-shift), v["echo_phase"]-shift*e.delay/scale)
		}
		lag, overlap := e.match(predicted, e.parts[1], e.delay)
		table.Absolute(c.name+": lag", float64(lag), e.delay*timeRate, 1, "light ring to surface and back")
		table.Complex(c.name+": overlap", overlap, 1, 1e-6, "barrier integrated at each frequency")
	}
}

// Pulses and comb need no barrier: every pulse is a delayed, damped and turned copy.
func TestPhysicsPulsesAtTheirDelays(t *testing.T) {
	table := checktable.New(t, "pulse against the one before it: lag in samples of 1/32768 s, overlap")
	for _, c := range append(trains("pulses"), trains("comb")...) {
		if c.values["line_stretch"] != 0 {
			continue // dispersed pulses have no one delay
		}
		e := trainOf(t, c, 2, 3)
		v := e.c.values
		for n := 1; n < len(e.parts); n++ {
			delay, factor := e.delay, complex(v["pulse_damping"], 0)
			switch {
			case c.s.Model == "comb":
				// exp(-2 pi i f t) of any line, and exp(-pi w t) of a line of full width w at
				// half power, at t = one over the spacing.
				factor = cmplx.Rect(math.Exp(-math.Pi*v["line_width"]*delay), -2*math.Pi*v["line_shift"])
			case n == 1 && v["pulse_rise"] > 0:
				continue // the copies rise, the ringdown does not
			case n == 1:
				delay, factor = v["pulse_delay"], complex(v["pulse_amplitude"], 0)
			default:
				delay = v["pulse_delay"] * v["spacing_ratio"]
			}
			lag, overlap := e.match(e.parts[n-1], e.parts[n], delay)
			table.Absolute(fmt.Sprintf("%s, pulse %d: lag", c.name, n), float64(lag), delay*timeRate, 1, "the delay as given")
			if c.s.Model == "pulses" {
				factor *= cmplx.Rect(1, v["pulse_turn"])
			}
			table.Complex(fmt.Sprintf("%s, pulse %d: factor", c.name, n), overlap, factor, 1e-9, "damping and turn as given")
		}
	}
}
