package report

import (
	"fmt"
	"math"
	"strconv"

	"gonum.org/v1/plot"
)

// maxTicks bounds the labelled ticks of an axis.
const maxTicks = 8

// evenTicks marks a linear axis at round numbers: steps of 1, 2 or 5 times a power
// of ten.
func evenTicks(low, high float64) []plot.Tick {
	step := roundStep((high - low) / maxTicks)
	var ticks []plot.Tick
	first, last := math.Ceil(low/step-1e-9), math.Floor(high/step+1e-9)
	for i := 0.0; first+i <= last && i <= 2*maxTicks; i++ {
		// Through the shortest decimal: 3 * 0.1 is not 0.3.
		value := tidy((first + i) * step)
		ticks = append(ticks, plot.Tick{Value: value, Label: strconv.FormatFloat(value, 'g', -1, 64)})
	}
	return ticks
}

// roundStep is the smallest of 1, 2, 5 times a power of ten that is at least x.
func roundStep(x float64) float64 {
	power := math.Pow(10, math.Floor(math.Log10(x)))
	for _, f := range []float64{1, 2, 5} {
		if f*power >= x*(1-1e-9) {
			return f * power
		}
	}
	return 10 * power
}

// tidy drops the digits after the twelfth.
func tidy(x float64) float64 {
	y, err := strconv.ParseFloat(strconv.FormatFloat(x, 'e', 11, 64), 64)
	if err != nil {
		return x
	}
	return y
}

// decadeTicks marks a logarithmic axis at powers of ten, every so many of them that
// the labels do not crowd; over less than two decades at 1, 2, 5 times a power.
func decadeTicks(low, high float64) []plot.Tick {
	from, to := math.Floor(math.Log10(low)), math.Ceil(math.Log10(high))
	every, decades := 1.0, math.Log10(high)-math.Log10(low)
	if decades > maxTicks-1 {
		every = math.Ceil(decades / (maxTicks - 1))
	}
	narrow := decades < 2
	var ticks []plot.Tick
	for e := from; e <= to; e++ {
		for f := 1; f < 10; f++ {
			value, err := strconv.ParseFloat(fmt.Sprintf("%de%.0f", f, e), 64)
			if err != nil || value < low*(1-1e-9) || value > high*(1+1e-9) {
				continue
			}
			label := ""
			switch {
			case narrow && (f == 1 || f == 2 || f == 5):
				label = strconv.FormatFloat(value, 'g', -1, 64)
			case f == 1 && math.Mod(e, every) == 0:
				label = powerLabel(e)
			case every > 1:
				// The ticks between decades would run together.
				continue
			}
			ticks = append(ticks, plot.Tick{Value: value, Label: label})
		}
	}
	return ticks
}

// powerLabel writes 10^e.
func powerLabel(e float64) string {
	if e >= -2 && e <= 3 {
		return strconv.FormatFloat(math.Pow(10, e), 'f', max(0, int(-e)), 64)
	}
	return fmt.Sprintf("1e%.0f", e)
}
