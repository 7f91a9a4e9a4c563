package main

import (
	"encoding/json"
	"fmt"
	"math"
	"strings"

	"github.com/urfave/cli/v2"

	"knell/internal/constants"
	"knell/internal/report"
	"knell/models/kerr"
)

func modesCommand() *cli.Command {
	return &cli.Command{
		Name:      "modes",
		Usage:     "print quasi-normal modes of a Kerr remnant",
		ArgsUsage: " ",
		Description: "Frequencies are M omega with time dependence exp(-i omega t); a negative m\n" +
			"is the counter-rotating family.",
		Flags: []cli.Flag{
			&cli.IntFlag{Name: "l", Value: 2, Usage: "polar number"},
			&cli.IntFlag{Name: "m", Value: 2, Usage: "azimuthal number"},
			&cli.IntSliceFlag{Name: "n", Value: cli.NewIntSlice(0), Usage: "overtone, 0 is the longest-lived; may be given several times"},
			&cli.Float64SliceFlag{Name: "spin", Usage: "dimensionless spin; may be given several times"},
			&cli.Float64Flag{Name: "mass", Usage: "detector-frame mass in solar masses, for Hz and s"},
			jsonFlag(),
		},
		Action: func(c *cli.Context) error {
			if c.Args().Present() {
				return &usageError{"modes takes no argument, found " + c.Args().First()}
			}
			if len(c.Float64Slice("spin")) == 0 {
				return &usageError{fmt.Sprintf("modes wants --spin, from 0 to %g", kerr.MaxSpin)}
			}
			mass := c.Float64("mass")
			if c.IsSet("mass") && !(mass > 0 && !math.IsInf(mass, 1)) {
				return &usageError{"--mass must be a finite number of solar masses above zero"}
			}
			var doc report.ModesDocument
			for _, spin := range c.Float64Slice("spin") {
				for _, n := range c.IntSlice("n") {
					mode, err := kerr.QuasiNormalMode(c.Int("l"), c.Int("m"), n, spin)
					if err != nil {
						return &usageError{strings.TrimPrefix(err.Error(), "kerr: ")}
					}
					doc.Modes = append(doc.Modes, modeEntry(mode, mass))
				}
			}
			if c.Bool("json") {
				return doc.WriteJSON(c.App.Writer)
			}
			return report.ModesTable(c.App.Writer, &doc)
		},
	}
}

// modeEntry is a mode's line; mass 0 leaves out what needs one.
func modeEntry(m kerr.Mode, mass float64) report.Mode {
	pair := func(z complex128) [2]report.Number {
		return [2]report.Number{report.Number(real(z)), report.Number(imag(z))}
	}
	e := report.Mode{
		L: m.L, M: m.M, N: m.N, Spin: report.Number(m.Spin),
		Omega: pair(m.Omega), Separation: pair(m.Separation),
	}
	if mass > 0 {
		scale := mass * constants.SolarMassSeconds
		frequency := report.Number(real(m.Omega) / (2 * math.Pi * scale))
		damping := report.Number(-scale / imag(m.Omega))
		e.Frequency, e.DampingTime = &frequency, &damping
	}
	return e
}

func jsonFlag() cli.Flag {
	return &cli.BoolFlag{Name: "json", Usage: "print one JSON document instead of a table"}
}

func printJSON(c *cli.Context, document any) error {
	encoder := json.NewEncoder(c.App.Writer)
	encoder.SetIndent("", "  ")
	return encoder.Encode(document)
}
