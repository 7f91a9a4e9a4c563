package trials

import (
	"fmt"
	"math"

	"knell/internal/report"
	"knell/validation"
)

const (
	// Limits of the standard deviation of z, and the number of seeds from which
	// on they hold as they are. With fewer, its sampling error widens them.
	deviationLow, deviationHigh = 0.85, 1.15
	fullSeeds                   = 100

	// LeastP is the p-value below which what should be uniform is not.
	LeastP = 0.001
)

// Calibration says how differences over quoted errors, z, are distributed, and what is
// allowed. All are NaN for fewer than two.
type Calibration struct {
	MeanZ      report.Number `json:"mean_z"`
	MeanZError report.Number `json:"mean_z_error"`
	MeanZLimit report.Number `json:"mean_z_limit"`
	StdZ       report.Number `json:"std_z"`
	StdZError  report.Number `json:"std_z_error"`
	StdZLow    report.Number `json:"std_z_low"`
	StdZHigh   report.Number `json:"std_z_high"`
}

// Calibrate judges pulls, of anything, and returns what is wrong with them.
func Calibrate(pulls []validation.Pull) (c Calibration, faults []string) {
	if len(pulls) < 2 {
		nan := report.Number(math.NaN())
		return Calibration{nan, nan, nan, nan, nan, nan, nan}, []string{fmt.Sprintf("runs to judge by: %d, want 2 at least", len(pulls))}
	}
	u := validation.UnitNormal(pulls)
	low, high := deviationLow, deviationHigh
	if len(pulls) < fullSeeds {
		low, high = min(low, u.Low), max(high, u.High)
	}
	n := float64(len(pulls))
	c = Calibration{
		MeanZ: report.Number(u.Mean), MeanZError: report.Number(u.Deviation / math.Sqrt(n)), MeanZLimit: report.Number(u.MeanLimit),
		StdZ: report.Number(u.Deviation), StdZError: report.Number(u.Deviation / math.Sqrt(2*(n-1))),
		StdZLow: report.Number(low), StdZHigh: report.Number(high),
	}
	if !(math.Abs(u.Mean) <= u.MeanLimit) {
		faults = append(faults, fmt.Sprintf("mean z %+.2f, want 0 ± %.2f", u.Mean, u.MeanLimit))
	}
	if !(u.Deviation >= low && u.Deviation <= high) {
		faults = append(faults, fmt.Sprintf("deviation of z %.2f, want %.2f to %.2f", u.Deviation, low, high))
	}
	return c, faults
}
