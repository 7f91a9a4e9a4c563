package validation

import (
	"context"
	"fmt"
	"math"
	"testing"

	"knell/internal/random"
	"knell/sampler"
)

// The cavity's log-evidence by nested sampling against brute force on the same
// likelihood: over 20 seeds the differences over the quoted errors are a unit
// normal's.
func TestEvidenceOfCavityAgreesWithQuadrature(t *testing.T) {
	p, err := NewCavityProblem(7)
	if err != nil {
		t.Fatal(err)
	}
	logZ := func(nodes [4]int) float64 {
		// The order of the cube: mass, amplitude, echo phase, reflectivity.
		v, err := LogQuadrature(p.NewTarget, []Rule{
			GaussLegendre(nodes[0]), GaussLegendre(nodes[1]), Trapezoid(nodes[2]), GaussLegendre(nodes[3]),
		})
		if err != nil {
			t.Fatal(err)
		}
		return v
	}
	// The coordinates are doubled one at a time: a product rule's error is the sum
	// of its rules' errors, to first order.
	nodes := [4]int{24, 14, 18, 12}
	truth := logZ(nodes)
	t.Logf("signal-to-noise ratio %.2f, ln Z = %.6f with %v nodes", p.SNR(), truth, nodes)
	// A fiftieth of the sampler's error below: it cannot move a pull by more.
	const tol = 0.002
	change := 0.0
	for d := range nodes {
		finer := nodes
		finer[d] *= 2
		v := logZ(finer)
		t.Logf("ln Z = %.6f with %v nodes", v, finer)
		change += math.Abs(v - truth)
	}
	if !(change < tol) {
		t.Fatalf("doubling the nodes of each coordinate changes ln Z by %.4f together, want below %g", change, tol)
	}

	pulls, err := PullsOf(context.Background(), p.NewTarget, sampler.Settings{
		Seed: 300, LivePoints: 250, Periodic: p.Periodic(),
	}, 20, truth)
	if err != nil {
		t.Fatal(err)
	}
	for _, q := range pulls {
		t.Logf("seed %d: ln Z = %.4f ± %.4f, z = %+.2f, %d calls", q.Seed, q.LogEvidence, q.Error, q.Z, q.Calls)
	}
	n := UnitNormal(pulls)
	t.Logf("z: mean %+.3f (limit %.3f), standard deviation %.3f (%.3f to %.3f)", n.Mean, n.MeanLimit, n.Deviation, n.Low, n.High)
	if !n.Sound() {
		t.Errorf("z has mean %+.3f and standard deviation %.3f, want a unit normal's: below %.3f and within %.3f to %.3f", n.Mean, n.Deviation, n.MeanLimit, n.Low, n.High)
	}
}

// bump is a product of normal densities, for which the integral is known.
type bump struct{ sigma []float64 }

func (b bump) Dim() int { return len(b.sigma) }

func (b bump) LogLikelihood(u []float64) (float64, error) {
	sum := 0.0
	for i, s := range b.sigma {
		z := (u[i] - 0.5) / s
		sum -= z*z/2 + math.Log(s*math.Sqrt(2*math.Pi))
	}
	return sum, nil
}

func TestLogQuadratureOfNormals(t *testing.T) {
	b := bump{[]float64{0.08, 0.3, 0.06}}
	rules := []Rule{GaussLegendre(40), GaussLegendre(12), Trapezoid(40)}
	got, err := LogQuadrature(func() (sampler.Target, error) { return b, nil }, rules)
	if err != nil {
		t.Fatal(err)
	}
	want := 0.0
	for _, s := range b.sigma {
		want += math.Log(math.Erf(0.5 / s / math.Sqrt2))
	}
	// The narrow normals are cut at six and eight deviations, where the trapezoid's
	// period has a kink of 1e-14.
	if math.Abs(got-want) > 1e-9 {
		t.Errorf("ln of the integral = %.12f, want %.12f", got, want)
	}
	if _, err := LogQuadrature(func() (sampler.Target, error) { return b, nil }, rules[:2]); err == nil {
		t.Error("two rules for three coordinates give no error")
	}
}

func TestUnitNormal(t *testing.T) {
	for _, tc := range []struct {
		why         string
		shift, wide float64
		sound       bool
	}{
		{"unit normals", 0, 1, true},
		{"errors quoted at half their size", 0, 2, false},
		{"errors quoted at three times their size", 0, 1.0 / 3, false},
		{"a bias of one error", 1, 1, false},
	} {
		t.Run(tc.why, func(t *testing.T) {
			rng := random.New(1, "unit normal test")
			pulls := make([]Pull, 20)
			for i := range pulls {
				pulls[i].Z = tc.shift + tc.wide*rng.NormFloat64()
			}
			if n := UnitNormal(pulls); n.Sound() != tc.sound {
				t.Errorf("sound = %v for %s", n.Sound(), fmt.Sprintf("%+v", n))
			}
		})
	}
}
