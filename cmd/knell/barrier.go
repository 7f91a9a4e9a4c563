package main

import (
	"fmt"
	"math"
	"strings"

	"github.com/urfave/cli/v2"

	"knell/internal/constants"
	"knell/internal/report"
	"knell/models/kerr"
)

func barrierCommand() *cli.Command {
	return &cli.Command{
		Name:      "barrier",
		Usage:     "print the response of a Kerr remnant's barrier to waves from the horizon side",
		ArgsUsage: " ",
		Description: "R and T are flux-normalised amplitudes of a wave exp(-i omega t) from just outside\n" +
			"the horizon: |R|^2 + (omega/k) |T|^2 = 1 with k = omega - m Omega_H. The greybody\n" +
			"factor is 1 - |R|^2; below zero it is amplification, which happens for\n" +
			"0 < omega < m Omega_H. Spin weight -2.\n\n" +
			"--omega takes numbers and ranges LOW:HIGH:STEP, parted by commas:\n" +
			"--omega 0.1,0.3,0.5 or --omega 0.001:1:0.01. A range also sets the span of a picture.",
		Flags: append([]cli.Flag{
			&cli.IntFlag{Name: "l", Value: 2, Usage: "polar number"},
			&cli.IntFlag{Name: "m", Value: 2, Usage: "azimuthal number"},
			&cli.Float64Flag{Name: "spin", DefaultText: "must be given", Usage: "dimensionless spin"},
			&cli.StringSliceFlag{Name: "omega", Usage: "frequencies M omega, a `LIST`; may be given several times"},
			&cli.StringFlag{Name: "parity", Value: "odd", Usage: "odd (Regge-Wheeler at spin 0) or even (Zerilli): the phase of R"},
			&cli.Float64Flag{Name: "mass", DefaultText: "none", Usage: "detector-frame mass in solar masses, for Hz"},
			jsonFlag(),
		}, pictureFlags()...),
		Action: barrier,
	}
}

func barrier(c *cli.Context) error {
	if c.Args().Present() {
		return &usageError{"barrier takes no argument, found " + c.Args().First()}
	}
	if !c.IsSet("spin") {
		return &usageError{fmt.Sprintf("barrier wants --spin, from 0 to %g", kerr.MaxSpin)}
	}
	if !c.IsSet("omega") {
		return &usageError{fmt.Sprintf("barrier wants --omega, frequencies from -%g to %g", kerr.MaxFrequency, kerr.MaxFrequency)}
	}
	list, err := parseFrequencies(c.StringSlice("omega"))
	if err != nil {
		return err
	}
	parity, err := chosenParity(c)
	if err != nil {
		return err
	}
	if err := checkMass(c); err != nil {
		return err
	}
	if err := checkPicture(c); err != nil {
		return err
	}
	w := barrierWave{l: c.Int("l"), m: c.Int("m"), spin: c.Float64("spin"), mass: c.Float64("mass"), parity: parity}
	points, err := w.points(list.values)
	if err != nil {
		return err
	}
	doc := report.BarrierDocument{
		L: w.l, M: w.m, Spin: report.Number(w.spin), Parity: parity.String(),
		HorizonFrequency: report.Number(kerr.HorizonFrequency(w.spin)), Points: points,
	}
	if w.mass > 0 {
		mass := report.Number(w.mass)
		doc.Mass = &mass
	}
	said, err := writePicture(c, func() (report.Picture, error) {
		line, err := w.points(evenly(list.span(w.usualSpan())))
		return report.BarrierPicture(&doc, line), err
	})
	if err != nil {
		return err
	}
	if c.Bool("json") {
		err = doc.WriteJSON(c.App.Writer)
	} else {
		err = report.BarrierTable(c.App.Writer, &doc)
	}
	if err != nil {
		return err
	}
	return said()
}

// barrierWave is one wave around one remnant.
type barrierWave struct {
	l, m   int
	spin   float64
	mass   float64 // 0 without one
	parity kerr.Parity
}

// points computes the response at frequencies.
func (w *barrierWave) points(omega []float64) ([]report.BarrierPoint, error) {
	points := make([]report.BarrierPoint, len(omega))
	for i, x := range omega {
		r, err := kerr.BarrierResponse(w.l, w.m, w.spin, x, w.parity)
		if err != nil {
			return nil, &usageError{strings.TrimPrefix(err.Error(), "kerr: ")}
		}
		reflected, transmitted := r.FromInfinity()
		points[i] = report.BarrierPoint{
			Omega: report.Number(x), Wave: report.Number(x - float64(w.m)*kerr.HorizonFrequency(w.spin)),
			Reflection: report.Pair(r.Reflection), Transmission: report.Pair(r.Transmission),
			Greybody: report.Number(r.Greybody), Separation: report.Number(r.Separation),
			FromInfinity: &report.Scattering{Reflection: report.Pair(reflected), Transmission: report.Pair(transmitted)},
		}
		if w.mass > 0 {
			hertz := report.Number(x / (2 * math.Pi * w.mass * constants.SolarMassSeconds))
			points[i].Frequency = &hertz
		}
	}
	return points, nil
}

// usualSpan is from near zero to where the barrier lets waves through: the circular
// photon orbit's frequency times l, and half as much again.
func (w *barrierWave) usualSpan() [2]float64 {
	radius, spin := kerr.LightRing(w.spin), w.spin
	if w.m <= 0 {
		radius, spin = kerr.RetrogradeLightRing(w.spin), -w.spin
	}
	// ApJ 178, 347 (1972), eq. 2.16: Omega = 1 / (r^(3/2) + a).
	orbit := 1 / (math.Pow(radius, 1.5) + spin)
	return [2]float64{0.005, min(1.5*(float64(w.l)+0.5)*orbit, kerr.MaxFrequency)}
}

// pictureSteps is how many pieces a picture's curve has.
const pictureSteps = 800

// evenly returns the ends of pictureSteps equal pieces from low to high.
func evenly(low, high float64) []float64 {
	x := make([]float64, pictureSteps+1)
	for i := range x {
		t := float64(i) / pictureSteps
		x[i] = (1-t)*low + t*high
	}
	return x
}

// chosenParity reads --parity.
func chosenParity(c *cli.Context) (kerr.Parity, error) {
	for _, p := range []kerr.Parity{kerr.Odd, kerr.Even} {
		if c.String("parity") == p.String() {
			return p, nil
		}
	}
	return kerr.Odd, &usageError{fmt.Sprintf("--parity = %q, want odd or even", c.String("parity"))}
}

// checkMass refuses a --mass that is none.
func checkMass(c *cli.Context) error {
	if mass := c.Float64("mass"); c.IsSet("mass") && !(mass > 0 && !math.IsInf(mass, 1)) {
		return &usageError{fmt.Sprintf("--mass = %g, want a finite number of solar masses above zero", mass)}
	}
	return nil
}
