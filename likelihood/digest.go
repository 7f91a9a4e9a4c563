package likelihood

import (
	"crypto/sha256"
	"encoding/binary"
	"fmt"
	"hash"
	"math"
)

// Digest identifies what the likelihood holds, by SHA-256: the grid, and for each site
// the whitened data, the weights by the noise density, the antenna response and the
// factorised gate, bit by bit. Two likelihoods of one digest, computed by one program,
// give the same value for every model; the numbers of a digest mean nothing else, and
// may change with the program. Cost O(sites (Grid.Count + Gate^2)).
func (g *Gaussian) Digest() [sha256.Size]byte {
	h := sha256.New()
	s := g.settings
	fmt.Fprintf(h, "%d samples at %v Hz, gate %d, grid %d %d %v, %d sites\n",
		g.samples, s.SampleRate, s.Gate, s.Grid.First, s.Grid.Count, s.Grid.Step, len(g.sites))
	for i := range g.sites {
		p := &g.sites[i]
		fmt.Fprintf(h, "site %q\n", p.code)
		digestFloats(h, []float64{p.plus, p.cross})
		for _, list := range [][]float64{p.dataRe, p.dataIm, p.weight, p.gateRe, p.gateIm, p.gate.inverse} {
			digestFloats(h, list)
		}
	}
	digestFloats(h, []float64{g.logNoise})
	return [sha256.Size]byte(h.Sum(nil))
}

// digestFloats adds the length of a list and its bits.
func digestFloats(h hash.Hash, list []float64) {
	var buffer [8 * 512]byte
	b := binary.LittleEndian.AppendUint64(buffer[:0], uint64(len(list)))
	for _, v := range list {
		if len(b)+8 > len(buffer) {
			h.Write(b)
			b = buffer[:0]
		}
		b = binary.LittleEndian.AppendUint64(b, math.Float64bits(v))
	}
	h.Write(b)
}
