package main

import (
	"math"
	"math/cmplx"
	"strings"

	"knell/internal/constants"
	"knell/internal/report"
	"knell/models/kerr"
)

// cavity is a surface, the barrier around it and the mode at which amplitudes are
// stated.
type cavity struct {
	mass, spin float64
	lnGap      float64 // ln(r0 - r+)
	logGap     float64 // log10(r0/r+ - 1)
	offset     float64 // log10 of the proper distance in Planck lengths
	mode       kerr.Mode
	parity     kerr.Parity
}

// scale is the unit of time in seconds.
func (v *cavity) scale() float64 { return v.mass * constants.SolarMassSeconds }

// hertz turns M omega into a frequency.
func (v *cavity) hertz(omega float64) float64 { return omega / (2 * math.Pi * v.scale()) }

// wave is k = omega - m Omega_H.
func (v *cavity) wave(omega float64) float64 {
	return omega - float64(v.mode.M)*kerr.HorizonFrequency(v.spin)
}

func (v *cavity) barrier(omega float64) (kerr.Response, error) {
	return kerr.BarrierResponse(v.mode.L, v.mode.M, v.spin, omega, v.parity)
}

// delayAt is the slope of the phase of q = R Rs exp(-2i k x0) by omega, in units of M:
// how long after the one before an echo comes at that frequency.
func (v *cavity) delayAt(omega float64) (float64, error) {
	// R turns by some 10 rad over 1: the error of the slope is of the order of h^2.
	const h = 1e-4
	low, err := v.barrier(omega - h)
	if err != nil {
		return 0, err
	}
	high, err := v.barrier(omega + h)
	if err != nil {
		return 0, err
	}
	return cmplx.Phase(high.Reflection/low.Reflection)/(2*h) - 2*kerr.TortoiseLog(v.spin, v.lnGap), nil
}

// document computes the result.
func (v *cavity) document(laws []surfaceLaw, echoes int) (*report.EchoDocument, error) {
	omega, scale := real(v.mode.Omega), v.scale()
	atMode, err := v.barrier(omega)
	if err != nil {
		return nil, err
	}
	delayAtMode, err := v.delayAt(omega)
	if err != nil {
		return nil, err
	}
	delay := kerr.EchoDelayLog(v.spin, v.lnGap) * scale
	horizon, temperature := kerr.HorizonFrequency(v.spin), kerr.HawkingTemperature(v.spin)
	d := &report.EchoDocument{
		Mass: report.Number(v.mass), Spin: report.Number(v.spin),
		L: v.mode.L, M: v.mode.M, N: v.mode.N, Parity: v.parity.String(),
		Offset: report.Number(v.offset), LogGap: report.Number(v.logGap),
		ProperDistance:    report.Number(math.Pow(10, v.offset) * constants.PlanckLength),
		HorizonFrequency:  report.Number(v.hertz(horizon)),
		AmplifiedBelow:    report.Number(v.hertz(float64(v.mode.M) * horizon)),
		Temperature:       report.Number(v.hertz(temperature)),
		TemperatureKelvin: report.Number(v.hertz(temperature) * constants.PlanckConstant / constants.BoltzmannConstant),
		HorizonRadius:     report.Number(kerr.HorizonRadius(v.spin)),
		LightRing:         report.Number(kerr.LightRing(v.spin)),
		Retrograde:        report.Number(kerr.RetrogradeLightRing(v.spin)),
		BarrierTortoise:   report.Number(kerr.Tortoise(v.spin, kerr.LightRing(v.spin))),
		SurfaceTortoise:   report.Number(kerr.TortoiseLog(v.spin, v.lnGap)),
		EchoDelay:         report.Number(delay),
		ModeSpacing:       report.Number(1 / delay),
		DelayAtMode:       report.Number(delayAtMode * scale),
		SpacingAtMode:     report.Number(1 / (delayAtMode * scale)),
		Mode: report.EchoMode{
			Omega:     report.Pair(v.mode.Omega),
			Frequency: report.Number(v.hertz(omega)), DampingTime: report.Number(-scale / imag(v.mode.Omega)),
			Reflection: report.Pair(atMode.Reflection), Magnitude: report.Number(cmplx.Abs(atMode.Reflection)),
		},
	}
	gain, at, err := kerr.SuperradiantGain(v.mode.L, v.mode.M, v.spin)
	if err != nil {
		return nil, err
	}
	largest, err := kerr.MaxStableReflectivity(v.mode.L, v.mode.M, v.spin)
	if err != nil {
		return nil, err
	}
	d.Stability = report.EchoStability{
		Gain: report.Number(gain), GainFrequency: report.Number(v.hertz(at)), MaxReflectivity: report.Number(largest),
	}
	for i := range laws {
		entry, err := v.law(&laws[i], cmplx.Abs(atMode.Reflection), echoes)
		if err != nil {
			return nil, err
		}
		d.Laws = append(d.Laws, *entry)
	}
	return d, nil
}

// law is one law's part of the document; r is the barrier's |R| at the mode.
func (v *cavity) law(s *surfaceLaw, r float64, echoes int) (*report.EchoLaw, error) {
	surface, err := s.at(v.spin, v.wave(real(v.mode.Omega)))
	if err != nil {
		return nil, err
	}
	q := r * surface
	entry := &report.EchoLaw{Law: s.name, Surface: report.Number(surface), Ratio: report.Number(q), Flux: report.Number(q * q)}
	for i, p := range s.parameters {
		entry.Parameters = append(entry.Parameters, report.EchoParameter{Name: p.Name, Value: report.Number(s.values[i])})
	}
	for n := 1; n <= echoes; n++ {
		entry.Echoes = append(entry.Echoes, report.Number(math.Pow(q, float64(n))))
	}
	return entry, v.addStability(entry, s)
}

// addStability says whether echoes can grow, and how fast the fastest cavity mode
// does.
func (v *cavity) addStability(entry *report.EchoLaw, s *surfaceLaw) error {
	var failure error
	reflectivity := func(k float64) float64 {
		rs, err := s.at(v.spin, k)
		if err != nil {
			failure = err
		}
		return rs
	}
	loop, _, err := kerr.MaxLoop(v.mode.L, v.mode.M, v.spin, reflectivity)
	if err == nil {
		err = failure
	}
	if err != nil {
		return err
	}
	entry.LargestRatio, entry.Stable = report.Number(loop), loop <= 1
	if entry.Stable {
		return nil
	}
	omega, growing, err := kerr.FastestGrowth(v.mode.L, v.mode.M, v.parity, v.spin, kerr.TortoiseLog(v.spin, v.lnGap), 0, reflectivity)
	switch {
	case err != nil:
		entry.Note = "growth time not known: " + strings.TrimPrefix(err.Error(), "kerr: ")
	case !growing:
		entry.Note = "no cavity mode lies where echoes would grow"
	default:
		growth := report.Number(v.scale() / imag(omega))
		entry.GrowthTime = &growth
	}
	return nil
}

// curves computes the curves of a picture, from near zero to where the barrier lets
// waves through.
func (v *cavity) curves(laws []surfaceLaw) (*report.EchoCurves, error) {
	w := barrierWave{l: v.mode.L, m: v.mode.M, spin: v.spin}
	span := w.usualSpan()
	// Where every law's amplitude is small already.
	high := min(max(1.6*real(v.mode.Omega), span[0]*2), kerr.MaxFrequency)
	omegas := evenly(span[0], high)
	c := &report.EchoCurves{Ratio: make([][]float64, len(laws))}
	for _, omega := range omegas {
		r, err := v.barrier(omega)
		if err != nil {
			return nil, err
		}
		size := cmplx.Abs(r.Reflection)
		c.Frequency = append(c.Frequency, v.hertz(omega))
		c.Barrier = append(c.Barrier, size)
		for i := range laws {
			surface, err := laws[i].at(v.spin, v.wave(omega))
			if err != nil {
				return nil, err
			}
			c.Ratio[i] = append(c.Ratio[i], size*surface)
		}
	}
	return c, nil
}
