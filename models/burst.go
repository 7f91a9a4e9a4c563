package models

import (
	"fmt"
	"math"
	"strconv"
)

// Burst is a sum of wave packets of which nothing is assumed: signal of unknown
// shape, such as a disturbance in one site alone. Packet j is
//
//	exp(-(t - time)^2 / (2 width^2)) exp(-2 pi i frequency (t - time))
//
// with t counted from the event time. Times its complex amplitude C (amplitude
// and phase at time) it moves the tip of (h+, hx) around an ellipse,
//
//	h+ = Re(C e),  hx = Re(i ellipticity C e),
//
// that is then turned by orientation in the sky,
//
//	h+ - i hx -> exp(-2 i orientation) (h+ - i hx).
//
// An ellipticity of 1 turns as m = 2 does seen from above, h+ - i hx = C e; -1
// the other way; 0 is linear. Any two complex amplitudes of h+ and hx are within
// reach, and so any pair of responses in two sites, one of them zero included.
// Orientation and orientation + pi/2 with the phase half a turn on are one
// signal: 0 to pi/2 already holds all.
//
// A Gaussian has no beginning. The model is meant for packets that lie wholly
// within the analysed data; what a packet has before the start is not cut off,
// and what reaches beyond the segment wraps around.
//
// Packets are alike, so their labels can be exchanged: the posterior of N packets
// has N! equal peaks unless the priors tell them apart.
//
// Parameters: amplitude, phase, time, frequency, width, ellipticity and
// orientation of packet 1, then of packet 2, and so on. With every amplitude 0
// the signal is zero.
type Burst struct {
	grid       Grid
	start      float64 // s after the event time, where t = 0 of the transform lies
	parameters []Parameter
	cos, sin   []float64 // scratch space
}

var (
	_ Model  = (*Burst)(nil)
	_ Bender = (*Burst)(nil)
)

// MaxPackets is the largest Settings.Count.
const MaxPackets = 16

const packetSize = 7 // parameters of a packet

func describeBurst(s Settings) ([]Parameter, error) {
	if s.Count < 1 || s.Count > MaxPackets {
		got := strconv.Itoa(s.Count)
		if s.Count == 0 {
			got = "nothing"
		}
		return nil, &SettingError{"count", got, fmt.Sprintf("the number of wave packets, 1 to %d", MaxPackets)}
	}
	var list []Parameter
	for j := 1; j <= s.Count; j++ {
		name := func(kind string) string { return kind + "_" + strconv.Itoa(j) }
		list = append(list,
			Parameter{Name: name("amplitude"), Note: "strain amplitude at the packet's middle", Low: 0, High: 1},
			Parameter{Name: name("phase"), Unit: "rad", Note: "phase at the packet's middle", Low: 0, High: 2 * math.Pi, Periodic: true},
			Parameter{Name: name("time"), Unit: "s", Note: "the packet's middle, after the event time", Low: -maxStart, High: maxStart},
			Parameter{Name: name("frequency"), Unit: "Hz", Note: "of the packet's oscillation", Low: 0, High: maxFrequency},
			Parameter{Name: name("width"), Unit: "s", Note: "standard deviation of the packet's Gaussian envelope", Low: 1e-6, High: maxStart},
			Parameter{Name: name("ellipticity"), Note: "0 linear, 1 circular as m = 2 from above, -1 as from below", Low: -1, High: 1},
			Parameter{Name: name("orientation"), Unit: "rad", Note: "of the ellipse in the sky; a quarter turn more is the opposite sign", Low: 0, High: math.Pi / 2, Periodic: true})
	}
	return list, nil
}

func newBurst(s Settings) (Model, error) {
	parameters, err := describeBurst(s)
	if err != nil {
		return nil, err
	}
	b := &Burst{grid: s.Grid, start: s.Start, parameters: parameters}
	return b.Clone(), nil
}

// Parameters implements Model.
func (b *Burst) Parameters() []Parameter { return b.parameters }

// Derived implements Model: nothing is derived.
func (b *Burst) Derived() []Parameter { return nil }

// Derive implements Model.
func (b *Burst) Derive(theta, out []float64) error { return nil }

// Clone implements Model.
func (b *Burst) Clone() Model {
	twin := *b
	twin.cos, twin.sin = make([]float64, b.grid.Count), make([]float64, b.grid.Count)
	return &twin
}

// Bent implements Bender.
func (b *Burst) Bent() []int {
	list := make([]int, len(b.parameters)/packetSize)
	for j := range list {
		list[j] = j*packetSize + 1
	}
	return list
}

// Bend implements Bender. A packet turned by a quarter turn is the same with the
// opposite sign: a phase that goes back by twice the orientation makes the ends of
// the orientation's domain one place.
func (b *Burst) Bend(i int, theta, _ []float64) float64 { return -2 * theta[i*packetSize+6] }

// Fill implements Model.
func (b *Burst) Fill(theta []float64, h *Polarizations) error {
	if err := checkDomain(b.parameters, theta); err != nil {
		return err
	}
	h.clear()
	for ; len(theta) >= packetSize; theta = theta[packetSize:] {
		amplitude, phase, time, frequency, width := theta[0], theta[1], theta[2], theta[3], theta[4]
		if amplitude == 0 {
			continue
		}
		sin, cos := math.Sincos(phase)
		c := complex(amplitude*cos, amplitude*sin)
		tilt := complex(0, theta[5]) * c // of hx before it is turned
		sin, cos = math.Sincos(2 * theta[6])
		w := wave{
			omegaRe: 2 * math.Pi * frequency,
			p:       c*complex(cos, 0) - tilt*complex(sin, 0),
			x:       c*complex(sin, 0) + tilt*complex(cos, 0),
		}
		b.addPacket(w, time-b.start, width, h)
	}
	return nil
}

// packetReach is how many standard deviations of its spectrum a packet is
// computed to: there it is exp(-40) = 3e-18 of its peak.
const packetReach = 9

// addPacket adds the transform of a packet: (p U + conj(p) V) / 2 as for a mode,
// with
//
//	V = width sqrt(2 pi) exp(-(width (2 pi f - omega))^2 / 2) exp(-2 pi i f t)
//
// and U the same about -omega.
func (b *Burst) addPacket(w wave, t, width float64, h *Polarizations) {
	g := b.grid
	step := 2 * math.Pi * g.Step
	reach := packetReach / width
	from := b.bin((w.omegaRe - reach) / step)
	to := b.bin((w.omegaRe+reach)/step + 1)
	// U reaches beyond where V does nowhere, as both are equally wide.
	if from >= to {
		return
	}
	tail := max(b.bin((reach-w.omegaRe)/step+1), from) // U is nothing from here on
	cos, sin := b.cos[from:to], b.sin[from:to]
	fillTurns(0, -step*t, float64(g.First+from), cos, sin)
	peak := width * math.Sqrt(2*math.Pi) / 2
	pr, pi := real(w.p)*peak, imag(w.p)*peak
	xr, xi := real(w.x)*peak, imag(w.x)*peak
	plusRe, plusIm := h.PlusRe[from:to], h.PlusIm[from:to]
	crossRe, crossIm := h.CrossRe[from:to], h.CrossIm[from:to]
	for j := range plusRe {
		angular := float64(g.First+from+j) * step
		near := width * (angular - w.omegaRe)
		v, u := math.Exp(-near*near/2), 0.0
		if from+j < tail {
			far := width * (angular + w.omegaRe)
			u = math.Exp(-far * far / 2)
		}
		// p U + conj(p) V
		sum, dif := u+v, u-v
		c, s := cos[j], sin[j]
		plusRe[j] += pr*sum*c - pi*dif*s
		plusIm[j] += pr*sum*s + pi*dif*c
		crossRe[j] += xr*sum*c - xi*dif*s
		crossIm[j] += xr*sum*s + xi*dif*c
	}
}

// bin is the grid's first bin at or above a multiple of its step.
func (b *Burst) bin(multiple float64) int {
	return int(max(0, min(math.Ceil(multiple)-float64(b.grid.First), float64(b.grid.Count))))
}
