package main

import (
	"fmt"
	"math"
	"strings"

	"github.com/urfave/cli/v2"

	"knell/internal/constants"
	"knell/internal/report"
	"knell/models"
	"knell/models/kerr"
)

func echoCommand() *cli.Command {
	return &cli.Command{
		Name:      "echo",
		Usage:     "print what a surface outside the would-be horizon does: delay, cavity modes, echo amplitudes",
		ArgsUsage: " ",
		Description: "The surface stands at a proper distance (--offset, log10 of Planck lengths, along the\n" +
			"axis) or at a coordinate distance (--gap, r0/r+ - 1). Amplitudes are stated at the real\n" +
			"frequency of one quasi-normal mode: the n-th echo has |q|^n of the ringdown's there,\n" +
			"|q| = |R Rs| with R the barrier's and Rs the surface's reflection.\n\n" +
			"Laws of the surface: " + strings.Join(models.ReflectivityNames(), ", ") + ".\n" +
			"--law NAME or --law NAME,PARAMETER=VALUE chooses one and sets its parameters, such as\n" +
			"--law constant,reflectivity=0.7; without it all are shown, with the values that stand\n" +
			"in the result.",
		Flags: append([]cli.Flag{
			&cli.Float64Flag{Name: "mass", DefaultText: "must be given", Usage: "detector-frame mass in solar masses"},
			&cli.Float64Flag{Name: "spin", DefaultText: "must be given", Usage: "dimensionless spin"},
			&cli.Float64Flag{Name: "offset", Usage: "log10 of the surface's proper distance from the would-be horizon in Planck lengths"},
			&cli.Float64Flag{Name: "gap", DefaultText: "none", Usage: "r0/r+ - 1 of the surface, instead of --offset"},
			&cli.IntFlag{Name: "l", Value: 2, Usage: "polar number"},
			&cli.IntFlag{Name: "m", Value: 2, Usage: "azimuthal number"},
			&cli.IntFlag{Name: "n", Value: 0, Usage: "overtone of the mode"},
			&cli.StringFlag{Name: "parity", Value: "odd", Usage: "odd or even: the phase of the barrier's reflection"},
			&cli.StringSliceFlag{Name: "law", Usage: "`LAW` of the surface and its parameters; may be given several times"},
			&cli.IntFlag{Name: "echoes", Value: 5, Usage: "how many echoes to list"},
			jsonFlag(),
		}, pictureFlags()...),
		Action: echo,
	}
}

// maxEchoes bounds --echoes.
const maxEchoes = 10000

func echo(c *cli.Context) error {
	if c.Args().Present() {
		return &usageError{"echo takes no argument, found " + c.Args().First()}
	}
	if !c.IsSet("mass") {
		return &usageError{"echo wants --mass, in solar masses"}
	}
	if !c.IsSet("spin") {
		return &usageError{fmt.Sprintf("echo wants --spin, from 0 to %g", kerr.MaxSpin)}
	}
	if err := checkMass(c); err != nil {
		return err
	}
	parity, err := chosenParity(c)
	if err != nil {
		return err
	}
	if n := c.Int("echoes"); n < 1 || n > maxEchoes {
		return &usageError{fmt.Sprintf("--echoes = %d, want 1 to %d", n, maxEchoes)}
	}
	laws, err := chosenLaws(c.StringSlice("law"))
	if err != nil {
		return err
	}
	if err := checkPicture(c); err != nil {
		return err
	}
	mode, err := kerr.QuasiNormalMode(c.Int("l"), c.Int("m"), c.Int("n"), c.Float64("spin"))
	if err != nil {
		return &usageError{strings.TrimPrefix(err.Error(), "kerr: ")}
	}
	v := &cavity{mass: c.Float64("mass"), spin: c.Float64("spin"), mode: mode, parity: parity}
	if err := v.place(c); err != nil {
		return err
	}
	doc, err := v.document(laws, c.Int("echoes"))
	if err != nil {
		return err
	}
	said, err := writePicture(c, func() (report.Picture, error) {
		curves, err := v.curves(laws)
		return report.EchoPicture(doc, curves), err
	})
	if err != nil {
		return err
	}
	if c.Bool("json") {
		err = doc.WriteJSON(c.App.Writer)
	} else {
		err = report.EchoTable(c.App.Writer, doc)
	}
	if err != nil {
		return err
	}
	return said()
}

// lnPlanck is the logarithm of the Planck length in units of the mass.
func lnPlanck(mass float64) float64 {
	return math.Log(constants.PlanckLength/constants.SolarMassMetres) - math.Log(mass)
}

// place puts the surface where --offset or --gap says, inside the light ring. Mass and
// spin are checked already.
func (v *cavity) place(c *cli.Context) error {
	ring := math.Log(kerr.LightRing(v.spin) - kerr.HorizonRadius(v.spin))
	lnRadius := math.Log(kerr.HorizonRadius(v.spin))
	if c.IsSet("gap") {
		if c.IsSet("offset") {
			return &usageError{"either --offset or --gap, not both"}
		}
		gap, limit := c.Float64("gap"), math.Exp(ring-lnRadius)
		v.lnGap, v.logGap = kerr.ExcessGap(v.spin, math.Log(gap)), math.Log10(gap)
		v.offset = (kerr.ProperDistance(v.spin, v.lnGap, kerr.Axis) - lnPlanck(v.mass)) / math.Ln10
		if gap > 0 && gap < limit && kerr.EchoDelayLog(v.spin, v.lnGap) > 0 {
			return nil
		}
		return &usageError{fmt.Sprintf("--gap = %g, want above 0 and below %.6g, where the light ring is", gap, limit)}
	}
	v.offset = c.Float64("offset")
	limit := (kerr.ProperDistance(v.spin, ring, kerr.Axis) - lnPlanck(v.mass)) / math.Ln10
	if limit <= minOffset {
		return &usageError{fmt.Sprintf("--mass = %g: the light ring lies below offset %d, want more mass", v.mass, minOffset)}
	}
	if v.offset >= minOffset && v.offset < limit {
		v.lnGap = kerr.SurfaceGap(v.spin, v.offset*math.Ln10+lnPlanck(v.mass), kerr.Axis)
		v.logGap = (v.lnGap - lnRadius) / math.Ln10
		if kerr.EchoDelayLog(v.spin, v.lnGap) > 0 {
			return nil
		}
	}
	return &usageError{fmt.Sprintf("--offset = %g, want %d to below %.6g, where the light ring is", v.offset, minOffset, limit)}
}

// minOffset is the lowest --offset, that of the cavity model too.
const minOffset = -40
