package sampler

import (
	"math"
	"slices"
)

// frame is the unit cube with each periodic dimension cut open where the live
// points leave the widest gap: v = (u - shift) mod 1. A cluster that straddles
// u = 0 is then in one piece. Where a periodic dimension is filled all round,
// the cut is one more wall, which costs efficiency and nothing else.
//
// A reflective dimension may be lifted besides, see lift: unfolded at a wall.
type frame struct {
	shift    []float64 // nil when no dimension is periodic
	periodic []bool
	wall     []wall // nil when no dimension is lifted
}

// newFrame cuts the periodic dimensions at the widest gaps of the n×dim points.
func newFrame(points []float64, dim int, periodic []bool) frame {
	f := frame{periodic: periodic}
	if !slices.Contains(periodic, true) {
		return f
	}
	f.shift = make([]float64, dim)
	column := make([]float64, len(points)/dim)
	for k := range dim {
		if !periodic[k] {
			continue
		}
		for i := range column {
			column[i] = points[i*dim+k]
		}
		slices.Sort(column)
		last := column[len(column)-1]
		widest := column[0] + 1 - last
		cut := last + widest/2
		for i := 1; i < len(column); i++ {
			if gap := column[i] - column[i-1]; gap > widest {
				widest, cut = gap, column[i-1]+gap/2
			}
		}
		f.shift[k] = wrap(cut)
	}
	return f
}

// into writes the frame coordinates of the cube point u to v. Of the two images
// of a lifted coordinate the bits of the coordinate choose one.
func (f *frame) into(u, v []float64) {
	f.cut(u, v)
	for k, w := range f.wall {
		if w != noWall {
			v[k] = w.unfold(u[k], side(k, u[k]))
		}
	}
}

// cut writes the coordinates of the cube point u with the periodic dimensions
// cut and no dimension lifted to v: unlike into, it is continuous but for the
// cuts.
func (f *frame) cut(u, v []float64) {
	copy(v, u)
	for k, s := range f.shift {
		if f.periodic[k] {
			v[k] = wrap(u[k] - s)
		}
	}
}

// outOf writes the cube point of the frame coordinates v to u.
func (f *frame) outOf(v, u []float64) {
	copy(u, v)
	for k, s := range f.shift {
		if f.periodic[k] {
			u[k] = wrap(v[k] + s)
		}
	}
	for k, w := range f.wall {
		if w != noWall {
			u[k] = w.fold(v[k])
		}
	}
}

// round reports whether v = 0 and v = 1 of the dimension are the same place.
func (f *frame) round(k int) bool {
	return f.shift != nil && f.periodic[k] || f.wall != nil && f.wall[k] != noWall
}

// wrap returns x modulo 1, in [0, 1).
func wrap(x float64) float64 {
	x -= math.Floor(x)
	if x >= 1 { // a negative x of less than half an ulp of 1
		return 0
	}
	return x
}

func insideCube(v []float64) bool {
	for _, x := range v {
		if !(x >= 0 && x <= 1) {
			return false
		}
	}
	return true
}
