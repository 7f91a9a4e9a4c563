package sampler

import "time"

// keepShare is the share of the time that keeping the state may take.
const keepShare = 0.01

// keeping is when the state was kept and how that went.
type keeping struct {
	last    time.Time     // when it was kept, or the run began
	cost    time.Duration // of the last time
	resumed int64         // likelihood calls of the state that was loaded
	trouble error         // of the last attempt
}

// saveIfDue keeps the state if the last time is long enough ago.
func (g *growing) saveIfDue() {
	if g.set.Keeper == nil {
		return
	}
	if g.last.IsZero() {
		g.last = g.began
	}
	pause := max(g.set.KeepEvery, time.Duration(float64(g.cost)/keepShare))
	if time.Since(g.last) >= pause {
		g.save()
	}
}

// save keeps the state now.
func (g *growing) save() {
	if g.set.Keeper == nil {
		return
	}
	from := time.Now()
	state, err := g.encode()
	if err == nil {
		err = g.set.Keeper.Save(state)
	}
	g.trouble = err
	g.last = time.Now()
	g.cost = g.last.Sub(from)
}
