package sampler

import (
	"context"
	"errors"
	"math"
	"testing"
)

func TestBadSettingsAreNamed(t *testing.T) {
	for _, tc := range []struct {
		field string
		s     Settings
	}{
		{"LivePoints", Settings{LivePoints: 31}},
		{"LivePoints", Settings{LivePoints: -1}},
		{"EvidenceError", Settings{EvidenceError: -0.1}},
		{"EvidenceError", Settings{EvidenceError: math.NaN()}},
		{"EvidenceError", Settings{EvidenceError: math.Inf(1)}},
		{"MaxGrowth", Settings{MaxGrowth: -1}},
		{"Remaining", Settings{Remaining: -1}},
		{"Remaining", Settings{Remaining: math.NaN()}},
		{"Remaining", Settings{Remaining: 2}},
		{"MaxCalls", Settings{MaxCalls: 999}},
		{"MaxCalls", Settings{MaxCalls: -1}},
		{"Workers", Settings{Workers: -2}},
		{"Periodic", Settings{Periodic: []bool{true}}},
		{"Reflective", Settings{Reflective: []bool{true, false, false}}},
		{"Reflective", Settings{Periodic: []bool{false, true}, Reflective: []bool{true, true}}},
		{"SliceSteps", Settings{SliceSteps: -1}},
	} {
		_, err := Run(context.Background(), gaussian(2, 0).target, tc.s)
		var bad *SettingError
		if !errors.As(err, &bad) || bad.Field != tc.field {
			t.Errorf("%+v: error %v, want a *SettingError for %s", tc.s, err, tc.field)
		}
	}
	_, err := Run(context.Background(), gaussian(12, 0).target, Settings{LivePoints: 51})
	if bad := (*SettingError)(nil); !errors.As(err, &bad) {
		t.Errorf("51 live points in 12 dimensions: %v, want a *SettingError", err)
	}
}
