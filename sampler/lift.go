package sampler

import (
	"math"
	"math/rand/v2"
	"slices"
)

// wall is the wall of the cube at which a reflective dimension is unfolded: the
// coordinate at distance d from the wall has the two images v = (1 ± d)/2. Both
// ends, v = 0 and v = 1, are the far wall, so v runs round a circle on which the
// likelihood is even, and a draw uniform on the circle is uniform in u: volumes
// in v are shares of the prior as they are in u.
//
// A region that leans on the wall, half an ellipsoid or in a corner less, is a
// whole one on the circle. v resolves d to 2⁻⁵², no worse than u does at u = 1.
type wall uint8

const (
	noWall wall = iota
	lowWall
	highWall
)

// distance returns how far u is from the wall.
func (w wall) distance(u float64) float64 {
	if w == highWall {
		return 1 - u
	}
	return u
}

// unfold returns the upper or the lower image of u.
func (w wall) unfold(u float64, upper bool) float64 {
	d := w.distance(u) / 2
	if upper {
		return 0.5 + d
	}
	return 0.5 - d
}

// fold returns the coordinate that has the image v.
func (w wall) fold(v float64) float64 {
	d := math.Abs(2*v - 1)
	if w == highWall {
		return 1 - d
	}
	return d
}

// side chooses an image of the coordinate u of dimension k. Every caller gets
// the same one for the same bits and needs no random stream. Half of all u have
// the upper image, however close together they are: the bits are mixed by a
// bijection in which each of them changes each with a probability of about a
// half (the finaliser of ACM SIGPLAN Not. 49, 453 (2014), constants from memory).
func side(k int, u float64) bool {
	x := math.Float64bits(u) + uint64(k+1)*0x9e3779b97f4a7c15
	x = (x ^ x>>30) * 0xbf58476d1ce4e5b9
	x = (x ^ x>>27) * 0x94d049bb133111eb
	return (x^x>>31)>>63 == 0
}

// liftGain is the log-volume that lifting a dimension has to save, a few times
// the noise of a volume measured by volumeTrial draws.
const liftGain = 0.1

// lift takes over what the last bound lifted, or decides anew: after ladderStep
// of compression, or twice as long each time that nothing changed. The wait
// saves time only.
func (b *bound) lift(points []float64, reflective []bool, logX float64, last *bound, rng *rand.Rand) {
	if !slices.Contains(reflective, true) {
		return
	}
	b.liftX, b.liftWait = logX, ladderStep
	if last == nil {
		b.frame.lift(points, b.dim, reflective, rng)
		return
	}
	if last.liftX-logX < last.liftWait {
		b.frame.wall, b.liftX, b.liftWait = last.frame.wall, last.liftX, last.liftWait
		return
	}
	b.frame.lift(points, b.dim, reflective, rng)
	if slices.Equal(b.frame.wall, last.frame.wall) {
		b.liftWait = min(2*last.liftWait, ladderMost)
	}
}

// lift decides which of the reflective dimensions are unfolded for the n×dim
// points of the cube, and at which wall.
//
// Asked are those in which the points reach up to the nearer wall: with d the
// distance from it, the variance on the circle, <d²>/4, is below that of u. If
// their density falls from the wall on, it is; if it is even, the two are the
// same; if it rises, or there are no points near the wall, it is above.
//
// Of these, the ones are lifted that make the ellipsoid around all points
// smaller, measured within the cube: what sticks out of a wall costs no call. So
// half a ball is lifted; a simplex, with its edge on the wall, is not, nor is
// a ridge that meets the wall at an angle.
func (f *frame) lift(points []float64, dim int, reflective []bool, rng *rand.Rand) {
	n := len(points) / dim
	walls, candidates := f.touched(points, dim, reflective)
	if len(candidates) == 0 {
		return
	}
	t := trialLift{dim: dim, walls: walls, x: make([]float64, n*dim), u: make([]float64, n*dim), members: make([]int, n)}
	for i := range n {
		t.members[i] = i
		f.cut(points[i*dim:(i+1)*dim], t.u[i*dim:(i+1)*dim])
	}
	lifted := make([]bool, dim)
	least := t.volume(lifted, rng)
	all := make([]bool, dim)
	for _, k := range candidates {
		all[k] = true
	}
	if v := t.volume(all, rng); v < least-liftGain {
		lifted, least = all, v
	}
	if len(candidates) > 1 {
		for _, k := range candidates {
			gain := liftGain
			if lifted[k] {
				gain = -liftGain
			}
			lifted[k] = !lifted[k]
			if v := t.volume(lifted, rng); v < least-gain {
				least = v
			} else {
				lifted[k] = !lifted[k]
			}
		}
	}
	if !slices.Contains(lifted, true) {
		return
	}
	f.wall = make([]wall, dim)
	for k, up := range lifted {
		if up {
			f.wall[k] = walls[k]
		}
	}
}

// touched returns the nearer wall of each reflective dimension, and the
// dimensions in which the points reach up to it.
func (f *frame) touched(points []float64, dim int, reflective []bool) (walls []wall, which []int) {
	n := float64(len(points) / dim)
	walls = make([]wall, dim)
	for k := range dim {
		if !reflective[k] {
			continue
		}
		var mean, variance, square float64
		for i := k; i < len(points); i += dim {
			mean += points[i] / n
		}
		walls[k] = lowWall
		if mean > 0.5 {
			walls[k] = highWall
		}
		for i := k; i < len(points); i += dim {
			d := walls[k].distance(points[i])
			square += d * d / n
			variance += (points[i] - mean) * (points[i] - mean) / n
		}
		if square/4 < variance {
			which = append(which, k)
		}
	}
	return walls, which
}

// trialLift measures the ellipsoid around points with dimensions lifted.
type trialLift struct {
	dim     int
	walls   []wall
	u, x    []float64 // n×dim: not lifted, lifted
	members []int     // all
}

// volume is the log of the volume within the cube of the ellipsoid around the
// points with the given dimensions lifted, or +Inf if it has none.
func (t *trialLift) volume(lifted []bool, rng *rand.Rand) float64 {
	copy(t.x, t.u)
	for k, up := range lifted {
		if !up {
			continue
		}
		for i := k; i < len(t.x); i += t.dim {
			t.x[i] = t.walls[k].unfold(t.u[i], side(k, t.u[i]))
		}
	}
	e, ok := fitEllipsoid(t.x, t.dim, t.members, newScatter(t.dim))
	if !ok {
		return math.Inf(1)
	}
	b := &bound{dim: t.dim, points: t.x, ellipsoids: []ellipsoid{e}}
	b.measure(rng)
	return b.logVolume
}
