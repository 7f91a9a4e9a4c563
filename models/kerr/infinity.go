package kerr

import "math/cmplx"

// FromInfinity returns reflection R∞ and transmission T∞ of the same barrier for
// a wave that comes from far away: the same real-potential function obeys
//
//	X → exp(-iωr*) + R∞ exp(iωr*) far away,   X → T∞ exp(-ikr*) at the horizon,
//
// with (k/ω)|T∞|² + |R∞|² = 1, so that 1 - |R∞|² is the greybody factor too.
//
// Let U be the function of Response. A real potential makes conj U a solution as
// well, and conj U - conj(R) U has no wave out of the horizon: it is
//
//	(1 - |R|²) exp(-ikr*) there,   conj(T) exp(-iωr*) - conj(R) T exp(iωr*) far away.
//
// Divided by conj T, with 1 - |R|² = (ω/k)|T|²:
//
//	R∞ = -conj(R) T / conj(T),   T∞ = (ω/k) T.
//
// Both keep the digits of R and T.
func (r Response) FromInfinity() (reflection, transmission complex128) {
	turn := r.Transmission / cmplx.Conj(r.Transmission)
	return -cmplx.Conj(r.Reflection) * turn, complex(r.ratio, 0) * r.Transmission
}
