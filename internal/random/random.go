// Package random gives reproducible random streams keyed by (seed, purpose,
// index). There is no global state: whoever needs random numbers names the
// stream, so a result does not depend on the order in which workers run.
package random

import (
	"crypto/sha256"
	"encoding/binary"
	"math/rand/v2"

	//lint:ignore SA1019 pinned in go.mod; streams are promised, so another generator would be a decision to change every result
	exprand "golang.org/x/exp/rand"
)

// Rand is one stream. It draws uniform, normal and exponential variates by the
// methods of math/rand/v2 and its state can be stored and restored.
//
// A Rand belongs to one goroutine at a time.
type Rand struct {
	*rand.Rand
	source *exprand.PCGSource
}

var _ rand.Source = (*exprand.PCGSource)(nil)

// New returns the stream of (seed, purpose, index...). Equal keys give equal
// streams; different keys give streams that start at unrelated places of the
// generator's 2^128 period (the SHA-256 digest of the key is its state).
func New(seed uint64, purpose string, index ...uint64) *Rand {
	key := make([]byte, 0, 8*(2+len(index))+len(purpose))
	key = binary.LittleEndian.AppendUint64(key, seed)
	// The length keeps ("a", 1) apart from a purpose that ends in those bytes.
	key = binary.LittleEndian.AppendUint64(key, uint64(len(purpose)))
	key = append(key, purpose...)
	for _, i := range index {
		key = binary.LittleEndian.AppendUint64(key, i)
	}
	digest := sha256.Sum256(key)
	r := &Rand{source: &exprand.PCGSource{}}
	if err := r.source.UnmarshalBinary(digest[:16]); err != nil {
		panic("random: the generator refused a 16-byte state: " + err.Error())
	}
	r.Rand = rand.New(r.source)
	return r
}

// MarshalBinary returns the stream's present state, 16 bytes.
func (r *Rand) MarshalBinary() ([]byte, error) { return r.source.MarshalBinary() }

// UnmarshalBinary sets the stream to a state stored by MarshalBinary.
func (r *Rand) UnmarshalBinary(state []byte) error {
	if r.source == nil {
		r.source = &exprand.PCGSource{}
		r.Rand = rand.New(r.source)
	}
	return r.source.UnmarshalBinary(state)
}
