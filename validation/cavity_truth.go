package validation

// Nodes of the cavity problem's quadrature, in the order of its cube: mass,
// amplitude, echo phase (periodic) and reflectivity. Doubling each changes ln Z by
// less than 0.002 nat together, as the test of the quadrature shows.
const (
	massNodes         = 24
	amplitudeNodes    = 14
	echoPhaseNodes    = 18
	reflectivityNodes = 12
)

// CavityTruth returns the log-evidence over noise of a problem from
// NewCavityProblem in nats, by LogQuadrature: 72,576 calls of the likelihood, a few
// seconds.
func CavityTruth(p *Problem) (float64, error) {
	return LogQuadrature(p.NewTarget, []Rule{
		GaussLegendre(massNodes), GaussLegendre(amplitudeNodes), Trapezoid(echoPhaseNodes), GaussLegendre(reflectivityNodes),
	})
}
