package main

import (
	"math"
	"slices"

	"knell/models/kerr"
)

// follower moves the ends of pieces with the features of the response over a
// panel, so that each piece keeps its place between them: the poles at the least
// damped modes of both signs of the frequency, and the turn at k = 0 on the scale
// of the surface gravity. Between features ends move by linear interpolation.
type follower struct {
	marks []mark // growing in frequency
}

// mark is a frequency that moves with spin: at the panel's middle, and at the
// nodes in t.
type mark struct {
	middle float64
	at     []float64
}

// newFollower prepares the panel of l, m whose middle is u with half-width half,
// for nodes t. fixed holds frequencies that stay, growing.
func newFollower(l, m int, u, half float64, t, fixed []float64) (*follower, error) {
	modes := map[float64][2]complex128{} // by u: those of m and of -m
	for _, x := range append([]float64{0}, t...) {
		v := u + half*x
		for i, n := range [2]int{m, -m} {
			mode, err := kerr.QuasiNormalMode(l, n, 0, spinAt(v))
			if err != nil {
				return nil, err
			}
			pair := modes[v]
			pair[i] = mode.Omega
			modes[v] = pair
		}
	}
	at := func(f func(u float64) float64) mark {
		k := mark{middle: f(u)}
		for _, x := range t {
			k.at = append(k.at, f(u+half*x))
		}
		return k
	}
	// j counts in damping rates or surface gravities.
	plus := func(j float64) mark {
		return at(func(u float64) float64 { w := modes[u][0]; return real(w) - j*imag(w) })
	}
	minus := func(j float64) mark {
		return at(func(u float64) float64 { w := modes[u][1]; return -real(w) - j*imag(w) })
	}
	turn := func(j float64) mark {
		return at(func(u float64) float64 {
			spin := spinAt(u)
			return float64(m)*kerr.HorizonFrequency(spin) + j*kerr.SurfaceGravity(spin)
		})
	}
	apart := at(func(u float64) float64 { return min(-imag(modes[u][0]), kerr.SurfaceGravity(spinAt(u))) })

	f := new(follower)
	for _, w := range fixed {
		f.marks = append(f.marks, at(func(float64) float64 { return w }))
	}
	// What comes first goes first: a mark too near to one before it is left out.
	marks := []mark{plus(0), minus(0), turn(0), plus(3), plus(-3), plus(10), minus(-3), minus(3), turn(-3), turn(3), plus(30)}
	if kerr.SurfaceGravity(spinAt(u)) < 0.1 {
		marks = append(marks, turn(-10))
	}
	for _, k := range marks {
		i, _ := slices.BinarySearchFunc(f.marks, k.middle, func(a mark, w float64) int {
			if a.middle < w {
				return -1
			}
			return 1
		})
		if i == 0 || i == len(f.marks) {
			continue
		}
		clear := true
		for j, w := range k.at {
			clear = clear && w-f.marks[i-1].at[j] > apart.at[j] && f.marks[i].at[j]-w > apart.at[j]
			// Next to the gap of T, a power of ω, ends move in proportion to ω.
			clear = clear && (math.Abs(f.marks[i-1].middle) != gap || w > 0.6*k.middle)
		}
		if clear {
			f.marks = slices.Insert(f.marks, i, k)
		}
	}
	return f, nil
}

// place returns where an end that is at w in the panel's middle is at the nodes.
func (f *follower) place(w float64) []float64 {
	i := 1
	for i < len(f.marks)-1 && w > f.marks[i].middle {
		i++
	}
	a, b := f.marks[i-1], f.marks[i]
	share := (w - a.middle) / (b.middle - a.middle)
	at := make([]float64, len(a.at))
	for j := range at {
		at[j] = (1-share)*a.at[j] + share*b.at[j]
	}
	return at
}

// spinAt is tanh u, kept from rounding past the largest spin.
func spinAt(u float64) float64 { return min(math.Tanh(u), kerr.MaxSpin) }
