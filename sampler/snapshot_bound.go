package sampler

// boundState is a bound as it is kept.
type boundState struct {
	Shift                                        []float64 // of the frame
	Wall                                         []wall
	Points, Pooled                               []float64
	Dim, Clusters, Way                           int
	Ellipsoids                                   []ellipsoidState
	Fits                                         bool
	Tight, Cumulative, Weight                    []float64
	LogVolume, LadderX, LadderExcess, LadderWait float64
	LiftX, LiftWait                              float64
	Mode                                         []int
}

type ellipsoidState struct {
	Mean, Factor, Inverse []float64
	LogDet, Radius2       float64
	Members               []int
}

func (b *bound) keep() boundState {
	k := boundState{
		Shift: b.frame.shift, Wall: b.frame.wall, Points: b.points, Pooled: b.pooled.a, Dim: b.dim, Clusters: b.clusters, Way: b.way, Fits: b.fits,
		Tight: b.tight, Cumulative: b.cumulative, Weight: b.weight, LogVolume: b.logVolume, Mode: b.mode,
		LadderX: b.ladderX, LadderExcess: b.ladderExcess, LadderWait: b.ladderWait,
		LiftX: b.liftX, LiftWait: b.liftWait,
	}
	for i := range b.ellipsoids {
		e := &b.ellipsoids[i]
		k.Ellipsoids = append(k.Ellipsoids, ellipsoidState{e.mean, e.factor, e.inverse, e.logDet, e.radius2, e.members})
	}
	return k
}

func (k *boundState) bound(s Settings) *bound {
	b := &bound{
		frame: frame{shift: k.Shift, periodic: s.Periodic, wall: k.Wall}, points: k.Points, pooled: scatter{k.Dim, k.Pooled},
		dim: k.Dim, clusters: k.Clusters, way: k.Way, fits: k.Fits, tight: k.Tight, cumulative: k.Cumulative, weight: k.Weight, logVolume: k.LogVolume, mode: k.Mode,
		ladderX: k.LadderX, ladderExcess: k.LadderExcess, ladderWait: k.LadderWait,
		liftX: k.LiftX, liftWait: k.LiftWait,
	}
	for _, e := range k.Ellipsoids {
		b.ellipsoids = append(b.ellipsoids, ellipsoid{mean: e.Mean, factor: e.Factor, inverse: e.Inverse, logDet: e.LogDet, radius2: e.Radius2, members: e.Members})
	}
	return b
}
