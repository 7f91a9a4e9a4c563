package event

import (
	"errors"
	"math"
	"path/filepath"
	"regexp"
	"strings"
	"testing"
	"time"

	"knell/internal/random"
)

// TestExtremeNumbers puts extreme values in the place of every number of a file.
// Each must be refused as input or give an event whose likelihood can be
// computed, without a panic and without taking long.
func TestExtremeNumbers(t *testing.T) {
	text := strings.NewReplacer("quiet = true", "quiet = false",
		`{ from = "curve" }`, `{ from = "data", segment = 0.5, smooth = 0.1 }`).Replace(tiny)
	number := regexp.MustCompile(`= \[?(-?[0-9][0-9.e+-]*)|, (-?[0-9][0-9.e+-]*)\]`)
	file := filepath.Join(t.TempDir(), "event.toml")
	accepted := 0
	for _, at := range number.FindAllStringSubmatchIndex(text, -1) {
		from, to := at[2], at[3]
		if from < 0 {
			from, to = at[4], at[5]
		}
		lineStart := strings.LastIndex(text[:from], "\n") + 1
		for _, value := range []string{"0", "-1", "5e-324", "1e300", "1e9", "0.3"} {
			changed := text[:from] + value + text[to:]
			began := time.Now()
			p, err := load(t, file, changed)
			if took := time.Since(began); took > 10*time.Second {
				t.Errorf("%s%s: took %v", text[lineStart:from], value, took)
			}
			if err != nil {
				var e *InputError
				if !errors.As(err, &e) {
					t.Errorf("%s%s: got error %v, want an InputError", text[lineStart:from], value, err)
				}
				readable(t, err.Error())
				continue
			}
			accepted++
			rng := random.New(1, "extreme")
			for _, h := range p.hypotheses {
				if _, high := h.set.Prior(3).Support(); high == 1e300 {
					// Strain of 1e300 overflows when squared; the sampler stops at NaN.
					continue
				}
				target := h.target()
				u := make([]float64, target.Dim())
				for range 20 {
					for j := range u {
						u[j] = rng.Float64()
					}
					if v, err := target.LogLikelihood(u); err != nil || math.IsNaN(v) || math.IsInf(v, 1) {
						t.Errorf("%s%s: %s: ln L = %v, error %v", text[lineStart:from], value, h.Name, v, err)
						break
					}
				}
			}
		}
	}
	if accepted < 20 {
		t.Errorf("only %d events were accepted: nothing is tested", accepted)
	}
}
