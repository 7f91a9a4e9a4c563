package models

import (
	"math"
	"math/cmplx"
	"slices"
	"strings"
	"testing"

	"gonum.org/v1/gonum/dsp/fourier"

	"knell/internal/checktable"
	"knell/internal/constants"
	"knell/internal/random"
	"knell/models/kerr"
)

// thetaByName is namedTheta for values that all belong to the model.
func thetaByName(t testing.TB, m Model, values map[string]float64) []float64 {
	t.Helper()
	for name := range values {
		if !slices.ContainsFunc(m.Parameters(), func(p Parameter) bool { return p.Name == name }) {
			t.Fatalf("the model has no parameter %s", name)
		}
	}
	return namedTheta(t, m, values)
}

// The sampling of the time-domain tests: far above the modes' 250 Hz.
const timeRate = 32768.0 // Hz

// probe looks at a signal through a filter that spreads it over probeSamples
// samples to later times, and not to earlier ones: the difference of two boxes'
// eightfold convolutions, one later than the other. Its transform is
//
//	sinc(f b)^8 exp(-8 pi i f b) (1 - exp(-2 pi i f w)),
//
// b four samples and w the length of the eightfold box. A signal that begins at the start
// still begins there after it, however it is cut to a band: beyond the Nyquist
// frequency, which the grid leaves out, the filter is below (2.5 pi)^-8 = 7e-8, and
// at f = 0, which a grid cannot hold, it is nothing. So what a cut of the bare
// spectrum rings into the time before the start (some 1e-4 of the energy, by
// Parseval the share of the 1/f tail) is gone, and a limit of 1e-6 in energy is
// one on the signal.
const (
	probeBox     = 4
	probePower   = 8
	probeSamples = 2 * probeBox * probePower
)

func probe(f float64) complex128 {
	x := math.Pi * f * probeBox / timeRate
	box := 1.0
	if x != 0 {
		box = math.Sin(x) / x
	}
	w := probeBox * probePower / timeRate
	return cmplx.Rect(math.Pow(box, probePower), -probePower*x) * (1 - cmplx.Rect(1, -2*math.Pi*f*w))
}

// notch is probe with a zero at the frequency m Omega_H of the case's modes, by two
// taps each side one after the other: it, too, moves nothing to earlier times.
//
// A law in |k| has a kink at k = 0. Such a law alone is not causal: a factor that is
// real at every frequency answers a pulse as much before as after it, and the kink
// makes that answer fall with the square of the time only. The tails of
// exp(-|k| / 2 T_H) are those of a Lorentzian of half width 1 / 2 T_H, 15 M or 5 ms
// at spin 0.69 and 68 solar masses; over a second they fall to below 1e-4 of the
// peak. They are the published law's, not the transform's. With each zero in the
// spectrum at k = 0 they fall faster by one power of (1 ms / time).
func (c timeCase) notch(t testing.TB) func(f float64) complex128 {
	if !c.kink {
		return probe
	}
	var at []float64
	for _, mode := range c.s.Modes {
		_, m, _, err := ParseMode(mode)
		if err != nil {
			t.Fatal(err)
		}
		f := math.Abs(float64(m)) * kerr.HorizonFrequency(c.values["spin"]) / (2 * math.Pi * c.values["mass"] * constants.SolarMassSeconds)
		if !slices.Contains(at, f) {
			at = append(at, f)
		}
	}
	const w = probeBox * probePower / timeRate
	return func(f float64) complex128 {
		product := probe(f)
		for _, zero := range at {
			e := cmplx.Rect(1, -2*math.Pi*f*w)
			factor := 1 - complex(2*math.Cos(2*math.Pi*zero*w), 0)*e + e*e
			product *= factor * factor
		}
		return product
	}
}

// timeGrid is every frequency between zero and Nyquist of a segment.
func timeGrid(duration float64) Grid {
	return Grid{First: 1, Count: int(duration*timeRate)/2 - 1, Step: 1 / duration}
}

// timeSeries is h+ - i hx of a case at timeRate, through a filter, over a segment
// that begins at the analysis start; the second half of it is the time before.
func timeSeries(t testing.TB, c timeCase, duration, length float64, filter func(f float64) complex128) []complex128 {
	t.Helper()
	c.s.Grid, c.s.Length = timeGrid(duration), length
	m := newTestModel(t, c.s)
	return seriesThrough(fill(t, m, thetaByName(t, m, c.values), c.s.Grid.Count), c.s.Grid, filter)
}

// seriesThrough is h+ - i hx of a spectrum on a whole grid, filtered.
func seriesThrough(h *Polarizations, g Grid, filter func(f float64) complex128) []complex128 {
	n := 2 * (g.Count + 1)
	fft := fourier.NewFFT(n)
	transform := func(re, im []float64) []float64 {
		c := make([]complex128, n/2+1)
		for j := range re {
			c[g.First+j] = complex(re[j], im[j]) * filter(g.Frequency(j)) * complex(g.Step, 0)
		}
		return fft.Sequence(nil, c)
	}
	plus, cross := transform(h.PlusRe, h.PlusIm), transform(h.CrossRe, h.CrossIm)
	z := make([]complex128, n)
	for i := range z {
		z[i] = complex(plus[i], -cross[i])
	}
	return z
}

func energy(z []complex128) float64 {
	sum := 0.0
	for _, v := range z {
		sum += real(v)*real(v) + imag(v)*imag(v)
	}
	return sum
}

func largestOf(z []complex128) float64 {
	most := 0.0
	for _, v := range z {
		most = max(most, cmplx.Abs(v))
	}
	return most
}

// The energy before a signal's start, over the whole. A law with a kink has some there by
// itself, see notch: at the Hawking temperature and the Planck length less than 1e-6 of
// the whole, in a colder or a shorter cavity more. With the kink smoothed there is
// nothing in either.
func TestPhysicsNothingBeforeTheStart(t *testing.T) {
	const duration = 4.0
	table := checktable.New(t, "energy before the start (burst: outside its packets) over the whole; segment of 4 s, echoes within 1.5 s")
	for _, c := range timeCases {
		share := func(filter func(float64) complex128) float64 {
			z := timeSeries(t, c, duration, 1.5, filter)
			// From half the segment on it is the time before the analysis start; a signal
			// that begins later, or with a lead, moves the end of that time.
			first := int(math.Round(c.begins * timeRate))
			before := energy(z[len(z)/2 : len(z)+min(first, 0)])
			if first > 0 {
				before += energy(z[:first])
			}
			if c.ends > 0 {
				before += energy(z[int(math.Round(c.ends*timeRate))+probeSamples : len(z)/2])
			}
			return before / energy(z)
		}
		if c.kink {
			table.Absolute(c.name+", with zeros at its kink", share(c.notch(t)), 0, 1e-6, "causality")
		}
		if !c.cold {
			table.Absolute(c.name, share(probe), 0, 1e-6, "causality")
		}
	}
}

// A segment twice as long holds the same signal in its first half: nothing wraps
// around. The length of data after the start is the same, so that both hold the
// same echoes, the last of which dies out within the shorter segment.
func TestPhysicsNoWrapAround(t *testing.T) {
	const duration = 2.0
	table := checktable.New(t, "change of the first 2 s when the segment is 4 s instead, over the peak")
	for _, c := range timeCases {
		filter := c.notch(t)
		short, long := timeSeries(t, c, duration, 1.5, filter), timeSeries(t, c, 2*duration, 1.5, filter)
		worst, before := 0.0, int(math.Round(math.Min(c.begins, 0)*timeRate))
		for i := range len(short) + before {
			worst = max(worst, cmplx.Abs(short[i]-long[i]))
		}
		name := c.name
		if c.kink {
			name += ", with zeros at its kink"
		}
		table.Absolute(name, worst/largestOf(short), 0, 1e-6, "a signal that ends within the segment")
	}
}

// A segment twice as long with data twice as long has more echoes, and the same signal
// before them. An echo has no sharp beginning: frequencies that turn back below the
// barrier's top come before the delay that the light ring gives, so the comparison ends
// 200 M before the first echo that the shorter data leave out.
func TestPhysicsLongerDataChangeNothingBefore(t *testing.T) {
	const short, long = 1.5, 3.5 // s of data in 2 s and 4 s
	table := checktable.New(t, "change of the first 1.5 s when segment and data are 2 s longer, over the peak")
	for _, c := range timeCases {
		filter := c.notch(t)
		a, b := timeSeries(t, c, 2, short, filter), timeSeries(t, c, 4, long, filter)
		end := short
		if c.s.Model == "cavity" {
			delay := kerr.EchoDelay(c.values["spin"], lnDistance(c.values["mass"], c.values["offset"])) * c.values["mass"] * constants.SolarMassSeconds
			end = math.Min(end, (math.Floor(short/delay)+1)*delay-200*c.values["mass"]*constants.SolarMassSeconds)
		}
		if stretch := math.Abs(c.values["line_stretch"]); stretch > 0 {
			// Of the first pulse whose slowest part comes too late, the fastest.
			spacing, delay := 1/c.values["line_spacing"], c.values["comb_delay"]
			end = math.Min(end, delay+(math.Floor((short-delay)/(spacing*(1+stretch)))+1)*spacing*(1-stretch))
		}
		worst := 0.0
		for i := range int(end * timeRate) {
			worst = max(worst, cmplx.Abs(a[i]-b[i]))
		}
		table.Absolute(c.name, worst/largestOf(a), 0, 1e-6, "echoes come in their order")
	}
}

// Causality and the absence of wrap-around do not hang on the places above: the same at
// random ones, for the laws without a kink.
func TestPhysicsCausalAtRandomPlaces(t *testing.T) {
	table := checktable.New(t, "energy before the start over the whole, and change of the first 2 s in a segment twice as long over the peak")
	for i, c := range []timeCase{
		{s: Settings{Model: "cavity", Modes: []string{"2,2,0"}, Reflectivity: "constant", Excitation: "barrier"}},
		{s: Settings{Model: "cavity", Modes: []string{"2,2,0"}, Reflectivity: "membrane", Excitation: "source", Parity: "even"}},
		{s: Settings{Model: "cavity", Modes: []string{"2,2,0"}, Reflectivity: "constant", Excitation: "infall"}},
		{s: Settings{Model: "pulses", Modes: []string{"2,2,0"}}},
		{s: Settings{Model: "comb"}},
	} {
		rng := random.New(5, "causal", uint64(i))
		early, change := 0.0, 0.0
		for range 4 {
			c.s.Inclination = math.Pi * rng.Float64()
			between := func(low, high float64) float64 { return low + (high-low)*rng.Float64() }
			list, err := Describe(c.s)
			if err != nil {
				t.Fatal(err)
			}
			c.values = map[string]float64{}
			for _, p := range list {
				switch p.Name {
				case "start_time":
					// at its default
				case "mass":
					c.values[p.Name] = between(20, 120)
				case "spin":
					c.values[p.Name] = between(0, 0.95)
				case "offset":
					c.values[p.Name] = between(-5, 20)
				case "infall_width":
					c.values[p.Name] = between(5e-4, 5e-3)
				case "infall_carrier":
					c.values[p.Name] = between(0.5, 1.2)
				case "pulse_delay", "comb_delay":
					c.values[p.Name] = between(0.05, 0.5)
				case "spacing_ratio":
					c.values[p.Name] = between(0.8, 1.2)
				case "pulse_amplitude":
					c.values[p.Name] = between(0, 2)
				case "pulse_rise":
					c.values[p.Name] = between(0, 0.005)
				case "line_spacing":
					c.values[p.Name] = between(2, 10)
				case "line_width":
					c.values[p.Name] = between(0, 3)
				case "band_centre":
					c.values[p.Name] = between(100, 400)
				case "band_width":
					c.values[p.Name] = between(40, 200)
				default:
					c.values[p.Name] = between(p.Low, p.High)
				}
			}
			// A stretched comb's pulses spread in time, by half of it.
			if _, is := c.values["line_stretch"]; is {
				c.values["line_stretch"] /= 3
			}
			short, long := timeSeries(t, c, 2, 1.3, probe), timeSeries(t, c, 4, 1.3, probe)
			early = math.Max(early, energy(long[len(long)/2:])/energy(long))
			peak := largestOf(short)
			for j := range short {
				change = math.Max(change, cmplx.Abs(short[j]-long[j])/peak)
			}
		}
		name := strings.TrimRight(c.s.Model+", "+c.s.Reflectivity+", "+c.s.Excitation, ", ")
		table.Worst(name+": before the start", early, 1e-6, "causality")
		table.Worst(name+": wrapped", change, 1e-6, "a signal that ends within the segment")
	}
}
