package sampler

import "math"

// links are points joined to their nearest neighbours, in the metric of how
// neighbours lie about one another.
type links struct {
	frame  frame
	dim    int
	metric ellipsoid
	v      []float64 // the points in the frame
	y      []float64 // and in that metric
	round  []int     // the periodic dimensions
	of     []int     // the component of each
	count  int       // of components
}

// newLinks joins the given points of o. It returns nil if they are too few to
// come apart, or have no spread in some direction.
func newLinks(o *Outcome, points []int) *links {
	n, dim := len(points), o.dim()
	k := linkNumber(n)
	if n < 2*(k+1) || n <= dim {
		return nil
	}
	flat := make([]float64, n*dim)
	for j, i := range points {
		copy(flat[j*dim:], o.Points[i])
	}
	c := &links{frame: newFrame(flat, dim, o.periodic), dim: dim, of: make([]int, n)}
	for k, periodic := range o.periodic {
		if periodic {
			c.round = append(c.round, k)
		}
	}
	c.v = make([]float64, n*dim)
	for j := range n {
		c.frame.into(flat[j*dim:(j+1)*dim], c.v[j*dim:(j+1)*dim])
	}
	metric := withinCovariance(c.v, dim, 1, c.of)
	c.y = make([]float64, n*dim)
	for round := 0; ; round++ {
		var ok bool
		if c.metric, ok = metric.ellipsoid(nil); !ok {
			return nil
		}
		for j := range n {
			lowerTimes(c.metric.inverse, c.v[j*dim:(j+1)*dim], nil, c.y[j*dim:(j+1)*dim])
		}
		if round == localRounds {
			break
		}
		metric = c.local()
	}
	c.join(c.nearest(k), k)
	return c
}

const (
	// The metric is made local in this many rounds from the differences to as
	// many nearest neighbours: the covariance of the whole is widest just in the
	// direction that parts two modes.
	localRounds, localNeighbours = 2, 5
)

// local is the covariance of the differences of the points from their nearest
// neighbours in the metric there is.
func (c *links) local() scatter {
	d := make([]float64, c.dim)
	s := newScatter(c.dim)
	near := c.nearest(localNeighbours)
	for at, j := range near {
		i := at / localNeighbours
		for k := range d {
			d[k] = c.v[int(j)*c.dim+k] - c.v[i*c.dim+k]
		}
		for _, k := range c.round {
			d[k] -= math.Round(d[k])
		}
		s.add(d)
	}
	s.scale(1 / float64(len(near)))
	return s
}

// linkNumber is the number of neighbours that n points are joined to, see Modes.
func linkNumber(n int) int {
	return int(math.Ceil(math.Log(float64(n)*modeLevels/modeChance) / 0.81))
}

// nearest returns the k nearest of each point, nearest first. There are more
// than k points.
func (c *links) nearest(k int) []int32 {
	n := len(c.of)
	near := make([]int32, n*k)
	gap := make([]float64, k) // of the nearest so far, rising
	for i := range n {
		who := near[i*k : (i+1)*k]
		v, y := c.v[i*c.dim:(i+1)*c.dim], c.y[i*c.dim:(i+1)*c.dim]
		for m := range gap {
			gap[m] = math.Inf(1)
		}
		for j := range n {
			if j == i {
				continue
			}
			d := c.gap2(v, y, j, gap[k-1])
			if d >= gap[k-1] {
				continue
			}
			at := k - 1
			for ; at > 0 && gap[at-1] > d; at-- {
				gap[at], who[at] = gap[at-1], who[at-1]
			}
			gap[at], who[at] = d, int32(j)
		}
	}
	return near
}

// join sets the components: two points are of one if either is among the k
// nearest of the other, or through others.
func (c *links) join(near []int32, k int) {
	n := len(c.of)
	root := make([]int, n)
	for i := range root {
		root[i] = i
	}
	find := func(i int) int {
		for root[i] != i {
			root[i] = root[root[i]]
			i = root[i]
		}
		return i
	}
	for at, j := range near {
		root[find(int(j))] = find(at / k)
	}
	number := make([]int, n)
	for i := range n {
		f := find(i)
		if number[f] == 0 {
			c.count++
			number[f] = c.count
		}
		c.of[i] = number[f] - 1
	}
}

// assign returns for each of the given points of o the component of the joined
// point nearest to it.
func (c *links) assign(o *Outcome, points []int) []int {
	of := make([]int, len(points))
	v, y := make([]float64, c.dim), make([]float64, c.dim)
	near := 0
	for j, i := range points {
		c.frame.into(o.Points[i], v)
		lowerTimes(c.metric.inverse, v, nil, y)
		least := c.gap2(v, y, near, math.Inf(1))
		for m := range c.of {
			if d := c.gap2(v, y, m, least); d < least {
				least, near = d, m
			}
		}
		of[j] = c.of[near]
	}
	return of
}

// gap2 is the squared distance of joined point j from the point of frame
// coordinates v and metric ones y, or some number of at least most. Of a periodic
// dimension the shorter way round counts: a ridge that winds through the cut is
// in one piece.
func (c *links) gap2(v, y []float64, j int, most float64) float64 {
	dim := c.dim
	x := c.y[j*dim : (j+1)*dim]
	var s float64
	if len(c.round) == 0 {
		for k, a := range y {
			d := a - x[k]
			if s += d * d; s >= most {
				break
			}
		}
		return s
	}
	for r, a := range y {
		d := a - x[r]
		for _, k := range c.round {
			if k > r {
				break
			}
			d -= c.metric.inverse[r*dim+k] * math.Round(v[k]-c.v[j*dim+k])
		}
		if s += d * d; s >= most {
			break
		}
	}
	return s
}
