package sampler

import (
	"fmt"
	"math"
)

// Target is a log-likelihood on the unit cube. One Target is used by one
// goroutine at a time.
type Target interface {
	// Dim is the number of coordinates, the same at every call.
	Dim() int

	// LogLikelihood returns ln L at u in nats. u has length Dim, lies in
	// [0, 1], and is only borrowed. -Inf means zero likelihood. An error, a NaN
	// or +Inf stops the run.
	LogLikelihood(u []float64) (float64, error)
}

// PointError reports the point of the unit cube at which a likelihood could
// not be used.
type PointError struct {
	Point []float64 // coordinates in the unit cube
	Value float64   // what LogLikelihood returned, in nats
	Err   error     // what LogLikelihood returned, or nil for a NaN or +Inf
}

func (e *PointError) Error() string {
	if e.Err != nil {
		return fmt.Sprintf("sampler: likelihood at u = %v: %v", e.Point, e.Err)
	}
	return fmt.Sprintf("sampler: log-likelihood at u = %v is %v, want a finite number or -Inf", e.Point, e.Value)
}

func (e *PointError) Unwrap() error { return e.Err }

// worker is a Target with the scratch memory of one goroutine.
type worker struct {
	target Target
	calls  int64 // since the slot began
	start  int   // survivor that slices started from in this slot, or -1

	cube              []float64 // point handed to the target
	x, trial, dir, tr []float64 // frame coordinates and directions
}

func newWorker(t Target, dim int) *worker {
	mem := make([]float64, 5*dim)
	return &worker{
		target: t,
		cube:   mem[0:dim:dim],
		x:      mem[dim : 2*dim : 2*dim],
		trial:  mem[2*dim : 3*dim : 3*dim],
		dir:    mem[3*dim : 4*dim : 4*dim],
		tr:     mem[4*dim:],
	}
}

// at calls the likelihood at u, counts the call and checks the answer.
func (w *worker) at(u []float64) (float64, error) {
	w.calls++
	l, err := w.target.LogLikelihood(u)
	if err != nil || math.IsNaN(l) || math.IsInf(l, 1) {
		return l, &PointError{Point: append([]float64(nil), u...), Value: l, Err: err}
	}
	return l, nil
}
