package main

import (
	"fmt"
	"io"

	"github.com/urfave/cli/v2"

	"knell/internal/report"
)

// pictureFlags belong to every command that can draw its result.
func pictureFlags() []cli.Flag {
	return []cli.Flag{
		&cli.StringFlag{Name: "plot", Usage: "draw the result into `FILE`.svg or FILE.png as well"},
		&cli.BoolFlag{Name: "replace", Usage: "let --plot overwrite a file"},
	}
}

// checkPicture refuses a --plot that could not be written, before any work.
func checkPicture(c *cli.Context) error {
	if !c.IsSet("plot") {
		if c.Bool("replace") {
			return &usageError{"--replace without --plot, want both or neither"}
		}
		return nil
	}
	if err := report.CheckPictureFile(c.String("plot"), c.Bool("replace")); err != nil {
		return &usageError{"--plot " + err.Error()}
	}
	return nil
}

// writePicture writes the picture of --plot, if any, before the result is printed:
// a command that fails prints none. It returns what to do after printing.
func writePicture(c *cli.Context, draw func() (report.Picture, error)) (said func() error, err error) {
	if !c.IsSet("plot") {
		return func() error { return nil }, nil
	}
	picture, err := draw()
	if err != nil {
		return nil, err
	}
	name := c.String("plot")
	if err := report.WritePicture(name, picture, c.Bool("replace")); err != nil {
		return nil, &usageError{fmt.Sprintf("--plot: %v, want a file that can be written", err)}
	}
	return func() error {
		var out io.Writer = c.App.ErrWriter
		text := "written to %s\n"
		if !c.Bool("json") {
			out, text = c.App.Writer, "\n"+text
		}
		_, err := fmt.Fprintf(out, text, name)
		return err
	}, nil
}
