package validation

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/stat"

	"knell/internal/constants"
	"knell/internal/random"
	"knell/likelihood"
	"knell/likelihood/strain"
	"knell/models"
	"knell/models/kerr"
)

// The gate's check: strain at four times the analysed rate, 16 s of it, with the
// signal's ringdown beginning at the analysis start.
const (
	rawRate    = 4096.0 // Hz
	rawLength  = 16.0   // s
	rawStart   = 1e9    // GPS s
	gateStart  = 8.0    // s after the first sample
	gateRate   = 1024.0 // Hz
	gateSpan   = 2.0    // s
	gateLength = 0.25   // s
	gateLow    = 40.0   // Hz
	gateHigh   = 440.0  // Hz
	gateCurve  = "second-generation-broadband"
	gatePlus   = 0.8
	gateCross  = -0.3
	gateAngle  = 0.4 // inclination, rad
)

// mass, spin, start_time, amplitude, phase
var gateTruth = []float64{68, 0.69, 0, 2e-21, 1.3}

// signalParts are a site's strain in the time domain, by formula, sample by
// sample: a ringdown that begins at gateStart, and what leads into it. The two
// join smoothly, as when the analysis starts some milliseconds after the peak:
// going back in time the amplitude first grows as the ringdown's, turns round at
// nearly three times that, and falls with the two thirds' power of an inspiral's frequency.
func signalParts(t *testing.T) (ringdown, before []float64) {
	t.Helper()
	track, err := kerr.NewModeTrack(2, 2, 0, gateAngle)
	if err != nil {
		t.Fatal(err)
	}
	omega, north, south, err := track.At(gateTruth[1])
	if err != nil {
		t.Fatal(err)
	}
	scale := gateTruth[0] * constants.SolarMassSeconds
	angular, rate := real(omega)/scale, -imag(omega)/scale
	// h+ = Re(C (S + S') e), hx = Re(i C (S - S') e), e = exp(-i omega t).
	c := turn(gateTruth[4]) * complex(gateTruth[3], 0)
	z := gatePlus*c*(north+south) + gateCross*1i*c*(north-south)

	n := int(rawRate * rawLength)
	start := int(rawRate * gateStart)
	ringdown, before = make([]float64, n), make([]float64, n)
	for i := start; i < n; i++ {
		after := float64(i-start) / rawRate
		ringdown[i] = math.Exp(-rate*after) * real(z*turn(-angular*after))
	}
	const (
		bend = 0.004 // s
		slow = 0.030 // s
	)
	phase, last := 0.0, angular
	for i := start - 1; i >= 0; i-- {
		back := float64(start-i) / rawRate
		// The frequency leaves the mode's slowly, so that the signal has next to
		// nothing where the filters end.
		w := inspiral(back*back/(back+slow), angular)
		phase += (w + last) / 2 / rawRate
		last = w
		amplitude := math.Exp(rate*bend*math.Tanh(back/bend)) * math.Pow(w/angular, 2.0/3)
		before[i] = amplitude * real(z*turn(phase))
	}
	return ringdown, before
}

func turn(angle float64) complex128 {
	sin, cos := math.Sincos(angle)
	return complex(cos, sin)
}

// inspiral is the angular frequency in rad/s at a time in s before the end of a
// leading-order inspiral of chirp mass 30 solar masses that ends at last:
// last (1 + back/tau)^(-3/8).
func inspiral(back, last float64) float64 {
	const m = 30 * constants.SolarMassSeconds
	tau := 5.0 / 256 * m * math.Pow(m*last/2, -8.0/3)
	return last * math.Pow(1+back/tau, -3.0/8)
}

// conditioned is raw strain as an event's: without low frequencies, at the lower
// rate.
func conditioned(t *testing.T, values []float64) *strain.Series {
	t.Helper()
	raw := &strain.Series{File: "made here", Site: "V0", StartSeconds: rawStart, SampleRate: rawRate, Values: values}
	s, err := strain.Condition(raw, gateRate, gateLow)
	if err != nil {
		t.Fatal(err)
	}
	return s
}

// gatedLikelihood is that of a segment whose gate ends where the analysis starts.
func gatedLikelihood(t *testing.T, segment []float64, gate int) *likelihood.Gaussian {
	t.Helper()
	curve, err := strain.Curve(gateCurve)
	if err != nil {
		t.Fatal(err)
	}
	spectrum, err := strain.SampleCurve(curve, 1/gateSpan, len(segment)/2+1, gateLow/2)
	if err != nil {
		t.Fatal(err)
	}
	density, err := likelihood.Loud(spectrum.Density, spectrum.Density, 1/gateSpan, gateLow, gateHigh, 4/gateLength)
	if err != nil {
		t.Fatal(err)
	}
	g, err := likelihood.New([]likelihood.Site{{
		Code: "V0", Strain: segment, Density: density,
		Plus: gatePlus, Cross: gateCross, Arrival: gateLength,
	}}, likelihood.Settings{SampleRate: gateRate, Gate: gate, Grid: gateGrid()})
	if err != nil {
		t.Fatal(err)
	}
	return g
}

func gateGrid() models.Grid {
	return models.Grid{First: int(gateLow * gateSpan), Count: int((gateHigh-gateLow)*gateSpan) + 1, Step: 1 / gateSpan}
}

// gateModel gives the polarisations at theta in a buffer of its own.
func gateModel(t *testing.T) func(theta []float64) *models.Polarizations {
	t.Helper()
	model, err := models.New(models.Settings{Model: "ringdown", Modes: []string{"2,2,0"}, Grid: gateGrid(), Inclination: gateAngle})
	if err != nil {
		t.Fatal(err)
	}
	h := models.NewPolarizations(gateGrid().Count)
	return func(theta []float64) *models.Polarizations {
		if err := model.Fill(theta, h); err != nil {
			t.Fatal(err)
		}
		return h
	}
}

func rawNoise(t *testing.T, seed uint64) []float64 {
	t.Helper()
	curve, err := strain.Curve(gateCurve)
	if err != nil {
		t.Fatal(err)
	}
	values, err := strain.Synthesize(random.New(seed, "gate noise"), curve, rawRate, int(rawRate*rawLength), gateLow/2)
	if err != nil {
		t.Fatal(err)
	}
	return values
}

// A signal that began before the analysis start, through the filters that real
// strain passes: with the gate its likelihood is what it is for the ringdown
// alone, all over a grid of masses, spins, amplitudes and phases; without the
// gate it is far off.
//
// The ringdown alone is added after the filters: a step at the start that went
// through them would be none.
func TestGateKeepsOutWhatCameBefore(t *testing.T) {
	ringdown, before := signalParts(t)
	noise := rawNoise(t, 5)
	whole := append([]float64(nil), noise...)
	for i := range whole {
		whole[i] += ringdown[i] + before[i]
	}
	n := int(gateRate * gateSpan)
	cut := func(s *strain.Series) []float64 {
		from := s.Index(rawStart+gateStart) - int(gateLength*gateRate)
		return s.Values[from : from+n]
	}
	wholeCut, aloneCut := cut(conditioned(t, whole)), cut(conditioned(t, noise))
	first := int((gateStart - gateLength) * rawRate)
	for i := range aloneCut {
		aloneCut[i] += ringdown[first+i*rawRate/gateRate]
	}
	fill := gateModel(t)

	for _, tc := range []struct {
		why  string
		gate int
		// Limits on the largest difference over the grid, in nats. With the gate
		// it is what the filters of the conditioning spread past the start.
		atLeast, atMost float64
	}{
		{"gate of a quarter second", int(gateLength * gateRate), 0, 0.1},
		{"no gate", 0, 20, math.Inf(1)},
	} {
		t.Run(tc.why, func(t *testing.T) {
			alone, whole := gatedLikelihood(t, aloneCut, tc.gate).Worker(), gatedLikelihood(t, wholeCut, tc.gate).Worker()
			h := fill(gateTruth)
			snr := alone.OptimalSNR(h, nil)[0]
			a, b := alone.LogRatio(h), whole.LogRatio(h)
			t.Logf("signal-to-noise ratio %.1f; ln L over noise at the truth %.3f, with what came before %.3f", snr, a, b)

			largest, bestA, bestB := 0.0, math.Inf(-1), math.Inf(-1)
			var peakA, peakB [5]float64
			for mass := 56.0; mass <= 80; mass += 2 {
				for spin := 0.39; spin < 0.92; spin += 0.05 {
					for _, amplitude := range []float64{1e-21, 1.5e-21, 2e-21, 2.5e-21, 3e-21} {
						for phase := 0.05; phase < 6.3; phase += 0.25 {
							theta := [5]float64{mass, spin, 0, amplitude, phase}
							h := fill(theta[:])
							a, b := alone.LogRatio(h), whole.LogRatio(h)
							largest = max(largest, math.Abs(a-b))
							if a > bestA {
								bestA, peakA = a, theta
							}
							if b > bestB {
								bestB, peakB = b, theta
							}
						}
					}
				}
			}
			t.Logf("over the grid ln L changes by up to %.4f; best %.2f at %.4g, with what came before %.2f at %.4g", largest, bestA, peakA, bestB, peakB)
			if !(largest >= tc.atLeast && largest <= tc.atMost) {
				t.Errorf("what came before changes ln L by up to %.3g over the grid, want %g to %g", largest, tc.atLeast, tc.atMost)
			}
			if tc.gate == 0 {
				return
			}
			if there := alone.LogRatio(fill(peakB[:])); bestA-there > 2*tc.atMost {
				t.Errorf("the grid's maximum moves from %v to %v, where ln L was %.3f lower", peakA, peakB, bestA-there)
			}
			// Half the squared ratio, give or take the ratio.
			if math.Abs(a-snr*snr/2) > 3*snr {
				t.Errorf("ln L at the truth = %.2f, want %.2f ± %.2f", a, snr*snr/2, snr)
			}
		})
	}
}

// Noise alone, through the filters: <d|h> over sqrt(<h|h>) is a unit normal, and
// the data's own quadratic form counts what the band leaves of the samples
// outside the gate.
func TestGatedNoiseIsCalibrated(t *testing.T) {
	n := int(gateRate * gateSpan)
	fill := gateModel(t)
	for _, gate := range []int{int(gateLength * gateRate), 0} {
		silence := gatedLikelihood(t, make([]float64, n), gate).LogNoise()
		var z, squares []float64
		for seed := range uint64(40) {
			s := conditioned(t, rawNoise(t, 1000+seed))
			// Every other second: stretches that share no sample outside the gate.
			for at := 4.0; at <= 10; at += gateSpan {
				from := s.Index(rawStart+at) - int(gateLength*gateRate)
				g := gatedLikelihood(t, s.Values[from:from+n], gate)
				w, h := g.Worker(), fill(gateTruth)
				snr := w.OptimalSNR(h, nil)[0]
				z = append(z, (w.LogRatio(h)+snr*snr/2)/snr)
				squares = append(squares, 2*(silence-g.LogNoise()))
			}
		}
		count := float64(len(z))
		mean, deviation := stat.MeanStdDev(z, nil)
		square, spread := stat.MeanStdDev(squares, nil)
		// Two numbers per hertz and second.
		want := 2 * (gateHigh - gateLow) * (gateSpan - float64(gate)/gateRate)
		t.Logf("gate of %d samples: <d|h>/|h| %.3f ± %.3f; <d|d> = %.1f ± %.1f, band and time hold %g", gate, mean, deviation, square, spread, want)
		if math.Abs(mean) > 3.5/math.Sqrt(count) || math.Abs(deviation-1) > 3.5/math.Sqrt(2*count) {
			t.Errorf("gate of %d samples: <d|h>/|h| has mean %.3f and deviation %.3f, want 0 and 1", gate, mean, deviation)
		}
		// The ramps to the loud frequencies are worth about a hundredth more.
		if ratio := square / want; ratio < 0.99 || ratio > 1.025 {
			t.Errorf("gate of %d samples: <d|d> = %.1f, want about %g", gate, square, want)
		}
	}
}
