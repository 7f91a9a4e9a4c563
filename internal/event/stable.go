package event

import (
	"fmt"
	"math"

	"knell/internal/random"
)

// The switch that excludes unstable points cuts a piece out of the prior. What is
// left has to be a density again, so its mass divides the evidence. The mass is
// found by draws from the prior, until it is known to massTolerance or maxDraws
// were made.
const (
	massTolerance = 2e-3
	massBlock     = 4096
	maxMassDraws  = 64 * massBlock
)

// allowed is the share of a prior that a constraint leaves.
type allowed struct {
	mass  float64 // 1 without a constraint
	error float64 // standard error of ln mass
}

// logMass is what to take off a log-evidence computed with the whole prior's
// density.
func (a allowed) logMass() float64 { return math.Log(a.mass) }

// restrict finds the share of h's prior at which its model is stable.
func (h *hypothesis) restrict(c *Config) error {
	h.allowed = allowed{mass: 1}
	if !h.Hypothesis.Stable {
		return nil
	}
	t := h.target()
	if t.stabler == nil {
		key := c.hypothesisKey(h.Name) + ".stable"
		return &InputError{File: c.File, Line: c.lines.line(key), Key: key, Got: "true", Want: "no such key: the model " + h.Model + " is always stable"}
	}
	u := make([]float64, h.set.Dim())
	kept, drawn := 0, 0
	for drawn < maxMassDraws {
		rng := random.New(c.Seed, "stable prior "+h.Name, uint64(drawn/massBlock))
		for range massBlock {
			for i := range u {
				u[i] = rng.Float64()
			}
			h.place(u, t.theta)
			stable, err := t.stabler.Stable(t.theta)
			if err != nil {
				return fmt.Errorf("hypothesis %s: %w", h.Name, err)
			}
			if stable {
				kept++
			}
		}
		drawn += massBlock
		f := float64(kept) / float64(drawn)
		h.allowed = allowed{mass: f, error: math.Sqrt((1 - f) / (f * float64(drawn)))}
		if kept > 0 && h.allowed.error < massTolerance {
			break
		}
	}
	if kept == 0 {
		key := c.hypothesisKey(h.Name) + ".stable"
		return &InputError{File: c.File, Line: c.lines.line(key), Key: key, Got: fmt.Sprintf("true, and none of %d draws from the prior is stable", drawn), Want: "a prior that reaches a reflectivity at which echoes do not grow"}
	}
	return nil
}

// hypothesisKey is the dotted key of a hypothesis's table.
func (c *Config) hypothesisKey(name string) string {
	for i, h := range c.Hypotheses {
		if h.Name == name {
			return fmt.Sprintf("hypothesis[%d]", i)
		}
	}
	return "hypothesis"
}

// unstable is the share of the posterior's weight at which the model is
// unstable; 0 for a model that never is.
func (h *hypothesis) unstable(points [][]float64, weights []float64) (float64, error) {
	t := h.target()
	if t.stabler == nil || h.Hypothesis.Stable {
		return 0, nil
	}
	bad, all := 0.0, 0.0
	for i, u := range points {
		all += weights[i]
		if weights[i] == 0 {
			continue
		}
		h.place(u, t.theta)
		stable, err := t.stabler.Stable(t.theta)
		if err != nil {
			return 0, err
		}
		if !stable {
			bad += weights[i]
		}
	}
	return bad / all, nil
}
