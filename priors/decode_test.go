package priors

import (
	"errors"
	"strings"
	"testing"
	"time"
)

func TestDecode(t *testing.T) {
	for _, tc := range []struct {
		kind   string
		fields map[string]any
		want   string
	}{
		{"uniform", map[string]any{"kind": "uniform", "low": int64(40), "high": 110.0}, "uniform on [40, 110]"},
		{"", map[string]any{"kind": "uniform", "low": 0, "high": 1}, "uniform on [0, 1]"},
		{"log-uniform", map[string]any{"low": 1e-22, "high": 1e-20}, "log-uniform on [1e-22, 1e-20]"},
		{"power", map[string]any{"low": 0.0, "high": 2.0, "exponent": int64(2)}, "power 2 on [0, 2]"},
		{"normal", map[string]any{"mean": 1.0, "sigma": 2.0}, "normal, mean 1, sigma 2"},
		{"normal", map[string]any{"mean": 1.0, "sigma": 2.0, "low": 0.0}, "normal, mean 1, sigma 2, on [0, +Inf]"},
		{"sine", nil, "sine on [0, 3.141592653589793]"},
		{"cosine", map[string]any{"high": 0.0}, "cosine on [-1.5707963267948966, 0]"},
		{"fixed", map[string]any{"value": 3.0}, "fixed at 3"},
	} {
		p, err := Decode(tc.kind, tc.fields)
		if err != nil {
			t.Errorf("%s: %v", tc.want, err)
			continue
		}
		if got := p.String(); got != tc.want {
			t.Errorf("Decode(%q, %v) = %s, want %s", tc.kind, tc.fields, got, tc.want)
		}
	}
}

func TestDecodeRejects(t *testing.T) {
	for _, tc := range []struct {
		kind   string
		fields map[string]any
		key    string
		says   string // must stand in the message
	}{
		{"gauss", nil, "kind", "log-uniform"},
		{"", nil, "kind", "nothing"},
		{"", map[string]any{"kind": 3}, "kind", "3 (int)"},
		{"uniform", map[string]any{"kind": "sine"}, "kind", "one of"},
		{"uniform", map[string]any{"low": 1.0}, "high", "uniform takes low, high"},
		{"uniform", map[string]any{"low": 1.0, "high": 2.0, "hihg": 3.0}, "hihg", "uniform takes low, high"},
		{"uniform", map[string]any{"low": "1", "high": 2.0}, "low", `"1"`},
		{"uniform", map[string]any{"low": true, "high": 2.0}, "low", "a number"},
		{"uniform", map[string]any{"low": 1.0, "high": time.Time{}}, "high", "a number"},
		{"uniform", map[string]any{"low": 3.0, "high": 2.0}, "low", "less than high = 2"},
		{"normal", map[string]any{"mean": 1.0, "sigma": 0.0}, "sigma", "> 0"},
		{"normal", map[string]any{"mean": 1.0, "sigma": 1.0, "value": 0.0}, "value", "optionally high, low"},
		{"sine", map[string]any{"mean": 1.0}, "mean", "optionally high, low"},
		{"fixed", map[string]any{}, "value", "nothing"},
	} {
		p, err := Decode(tc.kind, tc.fields)
		var field *FieldError
		if p != nil || !errors.As(err, &field) || field.Key != tc.key || !strings.Contains(err.Error(), tc.says) {
			t.Errorf("Decode(%q, %v) = %v, %v; want a *FieldError for %s with %q", tc.kind, tc.fields, p, err, tc.key, tc.says)
		}
	}
}

func FuzzDecode(f *testing.F) {
	f.Add("uniform", "low", 1.0, "high", 2.0, "exponent", 0.0)
	f.Add("power", "low", 0.0, "high", 2.0, "exponent", -0.999999)
	f.Add("normal", "mean", 0.0, "sigma", 1e-300, "low", 5.0)
	f.Add("sine", "low", 0.0, "high", 3.0, "kind", 3.0)
	f.Fuzz(func(t *testing.T, kind, k1 string, v1 float64, k2 string, v2 float64, k3 string, v3 float64) {
		p, err := Decode(kind, map[string]any{k1: v1, k2: v2, k3: v3})
		if err != nil {
			return
		}
		low, high := p.Support()
		for _, u := range []float64{0, 1e-9, 0.5, 1 - 1e-9, 1} {
			if x := p.Quantile(u); !(x >= low && x <= high) {
				t.Errorf("%v: Quantile(%g) = %g", p, u, x)
			}
		}
	})
}
