package report

import (
	"encoding/json"
	"math"
)

// Number is a float64 that JSON can always hold: NaN and the infinities, for which
// JSON has no word, are written as null, and null is read as NaN.
type Number float64

// MarshalJSON implements json.Marshaler.
func (x Number) MarshalJSON() ([]byte, error) {
	if !x.finite() {
		return []byte("null"), nil
	}
	return json.Marshal(float64(x))
}

// UnmarshalJSON implements json.Unmarshaler.
func (x *Number) UnmarshalJSON(text []byte) error {
	if string(text) == "null" {
		*x = Number(math.NaN())
		return nil
	}
	return json.Unmarshal(text, (*float64)(x))
}

func (x Number) finite() bool { return !math.IsNaN(float64(x)) && !math.IsInf(float64(x), 0) }
