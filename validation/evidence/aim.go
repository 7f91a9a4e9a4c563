package main

import "knell/validation/trials"

// aim is how many calls per accepted point the project aims at, for the Gaussian
// and the cavity: 3 in up to 6 dimensions, 20 up to 16, 120 up to 32; 0 for no aim.
func aim(c trials.Choice) float64 {
	if c.Name != "gaussian" && c.Name != trials.Cavity {
		return 0
	}
	switch {
	case c.Dim <= 6:
		return 3
	case c.Dim <= 16:
		return 20
	case c.Dim <= 32:
		return 120
	}
	return 0
}
