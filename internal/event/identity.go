package event

import (
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"fmt"
	"hash"
	"maps"
	"math"
	"runtime"
	"strings"

	"github.com/BurntSushi/toml"

	"knell/internal/random"
)

// identity tells the weighing of one hypothesis from every other. A kept state is gone
// on with only under an equal one, because only then does the result have the bits of
// a run without a break.
type identity struct {
	Hypothesis string `json:"hypothesis"`
	// What computed it. Bits are promised for equal ones of these three.
	Version   string `json:"version"`
	GoVersion string `json:"go_version"`
	Platform  string `json:"platform"`
	// Event is the SHA-256 of the event file as run, see settingsDigest.
	Event string `json:"event"`
	// Data is that of what the likelihood holds, see likelihood.Gaussian.Digest.
	Data string `json:"data"`
	// Values is that of the likelihood at a few fixed points. It sees what the
	// others cannot: a program changed without a change of its version, a processor
	// that rounds otherwise, a table changed by its command.
	Values string `json:"values"`
}

// probes is the number of points at which an identity asks for the likelihood.
const probes = 16

func (p *Prepared) identity(h *hypothesis, version string) identity {
	data := p.likelihood.Digest()
	return identity{
		Hypothesis: h.Name,
		Version:    version, GoVersion: runtime.Version(), Platform: runtime.GOOS + "/" + runtime.GOARCH,
		Event:  p.Config.settingsDigest(h.Hypothesis),
		Data:   hex.EncodeToString(data[:]),
		Values: h.valuesDigest(),
	}
}

// problem is the identity in 64 characters, for the sampler.
func (i identity) problem() string {
	text, err := json.Marshal(i)
	if err != nil {
		panic("event: an identity of texts cannot be encoded: " + err.Error())
	}
	sum := sha256.Sum256(text)
	return hex.EncodeToString(sum[:])
}

// difference says in what another identity differs from i, the one wanted; "" if in
// nothing. The first difference is the one that explains the others.
func (i identity) difference(other identity) string {
	const data = "other strain or another noise spectrum"
	switch {
	case other.Hypothesis != i.Hypothesis:
		return fmt.Sprintf("it is of hypothesis %s", other.Hypothesis)
	case other.Version != i.Version:
		return fmt.Sprintf("version %s began it, this is %s", other.Version, i.Version)
	case other.GoVersion != i.GoVersion || other.Platform != i.Platform:
		return fmt.Sprintf("a program built with %s for %s began it, this one with %s for %s", other.GoVersion, other.Platform, i.GoVersion, i.Platform)
	case other.Event != i.Event && other.Data != i.Data:
		return "it was begun with another event file or other options, and with " + data
	case other.Event != i.Event:
		return "it was begun with another event file or other options"
	case other.Data != i.Data:
		return "it was begun with " + data
	case other.Values != i.Values:
		return "its likelihood has other values: the program or the machine is another"
	}
	return ""
}

// settingsDigest is the SHA-256, in hexadecimal, of what the event file as run says
// about one hypothesis: every key and value, whatever their order, their layout and the
// comments. Left out are what alters no number of it: the title, the other hypotheses
// and the shared priors that only those use.
func (c *Config) settingsDigest(h Hypothesis) string {
	sum := sha256.New()
	values := map[string]any{}
	if _, err := toml.Decode(string(c.AsRun()), &values); err != nil {
		// AsRun gives back what Decode has read, or a config made without a file.
		sum.Write(c.AsRun())
		return hex.EncodeToString(sum.Sum(nil))
	}
	delete(values, "title")
	if list, ok := values["hypothesis"].([]map[string]any); ok {
		for _, t := range list {
			if t["name"] == h.Name {
				values["hypothesis"] = t
			}
		}
	}
	if shared, ok := values["prior"].(map[string]any); ok {
		used := map[string]bool{}
		for _, p := range h.Priors {
			used[p.Key] = true
		}
		shared = maps.Clone(shared)
		maps.DeleteFunc(shared, func(name string, _ any) bool { return !used["prior."+name] })
		values["prior"] = shared
	}
	writeCanonical(sum, values)
	return hex.EncodeToString(sum.Sum(nil))
}

// writeCanonical writes a value decoded from TOML so that equal values give equal bytes
// and unequal ones do not. fmt prints maps in the order of their keys, and a number
// with its type and all its digits.
func writeCanonical(out hash.Hash, values map[string]any) {
	fmt.Fprintf(out, "%#v", values)
}

// valuesDigest is the SHA-256, in hexadecimal, of the log-likelihood's bits at probes
// points of the unit cube, which do not depend on the event.
func (h *hypothesis) valuesDigest() string {
	rng := random.New(0, "identity of a hypothesis")
	sum := sha256.New()
	t := h.target()
	u := make([]float64, t.Dim())
	for range probes {
		for i := range u {
			u[i] = rng.Float64()
		}
		// A point that cannot be computed tells one program from another as well.
		l, err := t.LogLikelihood(u)
		fmt.Fprintf(sum, "%x %v\n", math.Float64bits(l), strings.TrimSpace(fmt.Sprint(err)))
	}
	return hex.EncodeToString(sum.Sum(nil))
}
