package sampler

import "math"

// links are points joined to their nearest neighbours, in the metric of their
// covariance.
type links struct {
	frame  frame
	dim    int
	metric ellipsoid
	y      []float64 // the points in that metric
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
	v := make([]float64, n*dim)
	for j := range n {
		c.frame.into(flat[j*dim:(j+1)*dim], v[j*dim:(j+1)*dim])
	}
	spread := withinCovariance(v, dim, 1, c.of)
	var ok bool
	if c.metric, ok = spread.ellipsoid(nil); !ok {
		return nil
	}
	c.y = make([]float64, n*dim)
	for j := range n {
		lowerTimes(c.metric.inverse, v[j*dim:(j+1)*dim], nil, c.y[j*dim:(j+1)*dim])
	}
	c.join(k)
	return c
}

// linkNumber is the number of neighbours that n points are joined to, see Modes.
func linkNumber(n int) int {
	return int(math.Ceil(math.Log(float64(n)*modeLevels/modeChance) / 0.81))
}

// join sets the components: two points are of one if either is among the k
// nearest of the other, or through others.
func (c *links) join(k int) {
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
	gap := make([]float64, 0, k) // of the nearest so far, rising
	who := make([]int, 0, k)
	for i := range n {
		gap, who = gap[:0], who[:0]
		x := c.y[i*c.dim : (i+1)*c.dim]
		for j := range n {
			if j == i {
				continue
			}
			most := math.Inf(1)
			if len(gap) == k {
				most = gap[k-1]
			}
			d := nearGap2(x, c.y[j*c.dim:(j+1)*c.dim], most)
			if d >= most {
				continue
			}
			if len(gap) < k {
				gap, who = append(gap, 0), append(who, 0)
			}
			at := len(gap) - 1
			for ; at > 0 && gap[at-1] > d; at-- {
				gap[at], who[at] = gap[at-1], who[at-1]
			}
			gap[at], who[at] = d, j
		}
		for _, j := range who {
			root[find(j)] = find(i)
		}
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
		least := nearGap2(y, c.y[near*c.dim:(near+1)*c.dim], math.Inf(1))
		for m := range c.of {
			if d := nearGap2(y, c.y[m*c.dim:(m+1)*c.dim], least); d < least {
				least, near = d, m
			}
		}
		of[j] = c.of[near]
	}
	return of
}

// nearGap2 is the squared distance of x and y, or some number of at least most.
func nearGap2(x, y []float64, most float64) float64 {
	var s float64
	for k, v := range x {
		d := v - y[k]
		if s += d * d; s >= most {
			break
		}
	}
	return s
}
