package event

import (
	"math"
	"reflect"

	"knell/internal/random"
	"knell/models"
)

// nesting says that one hypothesis is another, the full one, with a parameter
// held at a value.
type nesting struct {
	parameter  string
	value      float64
	coordinate int     // of the full hypothesis's unit cube
	at         float64 // the value there
	// logShare is ln of the share of the prior that "stable" leaves in the full
	// hypothesis less that in the nested one, error its standard error.
	logShare, error float64
}

// switchedOff are the values at which a parameter switches off its part of a
// signal, by name or family: a surface that reflects nothing, copies, lines, modes
// and packets without amplitude.
var switchedOff = []struct {
	parameter string
	value     float64
}{
	{"reflectivity", 0}, {"viscosity", 1}, {"infall_amplitude", 0},
	{"pulse_amplitude", 0}, {"comb_amplitude", 0}, {"amplitude", 0},
}

const (
	// nestedDraws is how many draws from the prior have to show that two signals
	// are one.
	nestedDraws = 16

	// nestedRounding is what the order of sums may change in a signal, relative to
	// its largest value.
	nestedRounding = 1e-10
)

// nestedIn says whether h is the hypothesis full with one parameter held fixed,
// and where. It is if
//
//   - every parameter of h is one of full and has the same prior there, but for at
//     most one that h holds fixed and full leaves free;
//   - if there is none of these, one of full's further parameters switches off, at
//     a value within its prior, what full has beyond h. Others, such as the phase
//     of an echo that there is not, mean nothing at that value; their priors are
//     normalised, so they do not matter;
//   - the prior density at the value is finite and not zero;
//   - the two signals are one at draws from the prior with the parameter at the
//     value, which settles what the settings of two models mean for one another.
//
// Then the Savage-Dickey ratio holds: priors are independent, and a bent
// parameter's shift moves no prior mass.
func (h *hypothesis) nestedIn(full *hypothesis) (nesting, bool) {
	fixed, ok := h.fixedBeside(full)
	if !ok {
		return nesting{}, false
	}
	if fixed != "" {
		if h.set.Len() != full.set.Len() {
			return nesting{}, false
		}
		value, _ := h.set.Prior(h.set.Index(fixed)).Support()
		return h.nestedAt(full, fixed, value)
	}
	for _, off := range switchedOff {
		for _, name := range full.set.FreeNames() {
			if h.set.Index(name) >= 0 || name != off.parameter && familyOf(name) != off.parameter {
				continue
			}
			if n, ok := h.nestedAt(full, name, off.value); ok {
				return n, true
			}
		}
	}
	return nesting{}, false
}

// fixedBeside compares the priors of h with those in full. It returns the name of
// the one parameter that h alone holds fixed, or "".
func (h *hypothesis) fixedBeside(full *hypothesis) (fixed string, ok bool) {
	for i, name := range h.set.Names() {
		k := full.set.Index(name)
		if k < 0 {
			return "", false
		}
		if reflect.DeepEqual(h.set.Prior(i), full.set.Prior(k)) {
			continue
		}
		if fixed != "" || h.set.FreeIndex(name) >= 0 || full.set.FreeIndex(name) < 0 {
			return "", false
		}
		fixed = name
	}
	return fixed, true
}

// nestedAt checks the rest of nestedIn for one parameter and value.
func (h *hypothesis) nestedAt(full *hypothesis, name string, value float64) (nesting, bool) {
	n := nesting{parameter: name, value: value, coordinate: full.set.FreeIndex(name)}
	index := full.set.Index(name)
	prior := full.set.Prior(index)
	low, high := prior.Support()
	if !(value >= low && value <= high) || math.IsInf(prior.LogDensity(value), 0) || h.Hypothesis.Stable && !full.Hypothesis.Stable {
		return n, false
	}
	for _, b := range full.bends {
		if b.parameter == index {
			return n, false
		}
	}
	n.at = coordinateOf(prior.Quantile, value)
	if math.Abs(prior.Quantile(n.at)-value) > 1e-12*(math.Abs(low)+math.Abs(high)) {
		return n, false
	}
	n.logShare = full.allowed.logMass() - h.allowed.logMass()
	n.error = math.Hypot(full.allowed.error, h.allowed.error)
	return n, h.sameSignal(full, index, n)
}

// coordinateOf returns the u in [0, 1] at which a quantile function, which does not
// fall, reaches the value.
func coordinateOf(quantile func(u float64) float64, value float64) float64 {
	low, high := 0.0, 1.0
	if quantile(low) >= value {
		return low
	}
	for range 200 {
		middle := low + 0.5*(high-low)
		if middle <= low || middle >= high {
			break
		}
		if quantile(middle) < value {
			low = middle
		} else {
			high = middle
		}
	}
	return high
}

// sameSignal says whether the two signals are one at draws from full's prior with
// the parameter at its value, and both stable there if full is to be.
func (h *hypothesis) sameSignal(full *hypothesis, index int, n nesting) bool {
	mine, other := h.target(), full.target()
	a, b := mine.h, models.NewPolarizations(len(mine.h.PlusRe))
	u := make([]float64, full.set.Dim())
	for i := range nestedDraws {
		rng := random.New(uint64(i), "nested draw")
		for k := range u {
			u[k] = rng.Float64()
		}
		u[n.coordinate] = n.at
		full.place(u, other.theta)
		other.theta[index] = n.value
		for k, name := range h.set.Names() {
			mine.theta[k] = other.theta[full.set.Index(name)]
		}
		if full.Hypothesis.Stable && !h.Hypothesis.Stable {
			if stable, err := other.stabler.Stable(other.theta); err != nil || !stable {
				return false
			}
		}
		if mine.model.Fill(mine.theta, a) != nil || other.model.Fill(other.theta, b) != nil || !equalSignals(a, b) {
			return false
		}
	}
	return true
}

func equalSignals(a, b *models.Polarizations) bool {
	var largest, apart float64
	for _, part := range [][2][]float64{{a.PlusRe, b.PlusRe}, {a.PlusIm, b.PlusIm}, {a.CrossRe, b.CrossRe}, {a.CrossIm, b.CrossIm}} {
		for j, x := range part[0] {
			largest = max(largest, math.Abs(x))
			apart = max(apart, math.Abs(x-part[1][j]))
		}
	}
	return apart <= nestedRounding*largest
}
