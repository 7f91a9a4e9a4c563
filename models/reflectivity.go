package models

import (
	"fmt"
	"math"
	"strings"
)

// reflectivity is the amplitude with which a surface reflects, as a function of
// the frequency k = omega - m Omega_H in the horizon's frame; its square is the
// energy reflectivity. The phase is a parameter of the cavity.
type reflectivity struct {
	name string
	// parameters of the law, in the order in which fill gets them.
	parameters []Parameter
	// fill writes the reflectivity at k0 + j dk (in units of 1/M), j in
	// range rs. law holds the law's parameters, temperature is the Hawking
	// temperature times M.
	fill func(law []float64, temperature, k0, dk float64, rs []float64)
}

var reflectivities = []reflectivity{
	{
		name: "constant",
		parameters: []Parameter{
			{Name: "reflectivity", Note: "amplitude reflectivity of the surface", Low: 0, High: 1},
		},
		fill: func(law []float64, _, _, _ float64, rs []float64) {
			for j := range rs {
				rs[j] = law[0]
			}
		},
	},
	{
		// Amplitude exp(-|k| / 2 T_H): arXiv:1905.00464 states the flux
		// reflectivity exp(-|k| / T_H).
		name: "boltzmann",
		parameters: []Parameter{
			{Name: "reflectivity", Note: "factor on the Boltzmann reflectivity", Low: 0, High: 1, Default: 1, HasDefault: true},
			{Name: "temperature", Note: "surface temperature over Hawking temperature", Low: math.SmallestNonzeroFloat64, High: math.Inf(1), Default: 1, HasDefault: true},
		},
		fill: func(law []float64, temperature, k0, dk float64, rs []float64) {
			fillExponential(law[0], 1/(2*law[1]*temperature), k0, dk, rs)
		},
	},
}

// fillExponential writes scale * exp(-rate |k0 + j dk|), by multiplication
// between fresh exponentials as a rotor does, each side of k = 0 for itself.
func fillExponential(scale, rate, k0, dk float64, rs []float64) {
	step := math.Abs(dk)
	up, down := math.Exp(rate*step), math.Exp(-rate*step)
	for j := 0; j < len(rs); {
		k := k0 + float64(j)*dk
		end := min(j+turnSpan, len(rs))
		ratio := down
		if k*dk < 0 {
			// |k| shrinks, as far as the sign lasts.
			ratio = up
			if left := -k / dk; left < turnSpan {
				end = min(end, j+int(left)+1)
			}
		}
		value := scale * math.Exp(-rate*math.Abs(k))
		for ; j < end; j++ {
			rs[j] = value
			value *= ratio
		}
	}
}

// ReflectivityNames lists the laws a cavity knows.
func ReflectivityNames() []string {
	names := make([]string, len(reflectivities))
	for i, r := range reflectivities {
		names[i] = r.name
	}
	return names
}

func findReflectivity(name string) (reflectivity, error) {
	for _, r := range reflectivities {
		if r.name == name {
			return r, nil
		}
	}
	return reflectivity{}, &SettingError{"reflectivity", fmt.Sprintf("%q", name), "one of " + strings.Join(ReflectivityNames(), ", ")}
}
