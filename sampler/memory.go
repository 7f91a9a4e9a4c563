package sampler

import "math"

const (
	// forgotten and remembered bound the largest correlation between the
	// coordinates of a walker's first and last place: below the one, slices may
	// take fewer steps, above the other they take more. On curved ridges too few
	// steps make ln Z high. Three times the least number is the limit because where
	// islands of likelihood part, more steps cost most of a run and change nothing;
	// the ridge of TestLong shows what is left (-run Long -long).
	forgotten, remembered = 0.2, 0.3

	moreSteps, fewerSteps = 1.2, 0.97 // per batch
	mostSteps             = 3         // times the least number
	doubtfulMemory        = 0.5       // correlation that is worth a warning
	memoryRate            = 0.1       // weight of a batch in the correlations
)

// memory watches what slices remember of the live point they started from, and
// sets their number of steps by it. Insertion ranks cannot see a walker that
// stays near its start; on curved ridges the evidences do.
type memory struct {
	steps       float64
	least       float64
	correlation []float64 // by whitened coordinate, running mean
	weight      float64   // of that mean, 0 before the first batch
	peak        float64   // largest correlation met with all steps in use
}

func newMemory(dim, steps int) memory {
	return memory{steps: float64(steps), least: float64(steps), correlation: make([]float64, dim)}
}

// learn takes in a batch of slices and returns the factor by which the number
// of steps changes. Coordinates are relative to the mean of the mode, a chain of
// overlapping ellipsoids, and whitened by the covariance within modes: between
// modes that have parted no number of steps would help.
func (m *memory) learn(st *stage, fresh *slots) float64 {
	dim := len(m.correlation)
	bd := st.bound
	if bd == nil {
		bd = &bound{dim: dim}
	}
	n := len(st.l)
	points := make([]float64, n*dim)
	mode := make([]int, n)
	for i := range n {
		x := points[i*dim : (i+1)*dim]
		u := st.u[i*dim : (i+1)*dim]
		bd.frame.into(u, x)
		mode[i] = bd.modeOf(x)
		// The image of a lifted coordinate is chosen anew for each place, so that
		// it would remember nothing: the coordinate itself is looked at.
		bd.frame.cut(u, x)
	}
	modes := max(1, len(bd.ellipsoids))
	metric := withinCovariance(points, dim, modes, mode)
	centres := make([]float64, modes*dim)
	meanCentres(points, dim, mode, centres)
	e, ok := metric.ellipsoid(nil)
	if !ok {
		return 1
	}
	whiten := func(x []float64, mode int, y []float64) {
		lowerTimes(e.inverse, x, centres[mode*dim:(mode+1)*dim], y)
	}
	a, b, x := make([]float64, dim), make([]float64, dim), make([]float64, dim)
	sum := make([]float64, dim)
	count := 0.0
	for slot, s := range fresh.start {
		if s < 0 {
			continue
		}
		whiten(points[s*dim:(s+1)*dim], mode[s], a)
		u := fresh.u[slot*dim : (slot+1)*dim]
		bd.frame.into(u, x)
		end := bd.modeOf(x)
		bd.frame.cut(u, x)
		whiten(x, end, b)
		for k := range sum {
			sum[k] += a[k] * b[k]
		}
		count++
	}
	if count == 0 {
		return 1
	}
	m.weight += memoryRate * (1 - m.weight)
	for k := range sum {
		m.correlation[k] += memoryRate * (sum[k]/count - m.correlation[k])
	}
	before := m.steps
	switch worst := m.worst(); {
	case worst > remembered:
		if m.steps == mostSteps*m.least {
			m.peak = max(m.peak, worst)
		}
		m.steps = min(m.steps*moreSteps, mostSteps*m.least)
	case worst < forgotten:
		m.steps = max(m.steps*fewerSteps, m.least)
	}
	return m.steps / before
}

// worst is the largest correlation.
func (m *memory) worst() float64 {
	w := math.Inf(-1)
	for _, c := range m.correlation {
		w = max(w, c/max(m.weight, memoryRate))
	}
	return w
}
