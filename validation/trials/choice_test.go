package trials

import (
	"slices"
	"testing"
)

func TestChosenProblems(t *testing.T) {
	for _, tc := range []struct {
		names, dims string
		want        []Choice
	}{
		{"shells,gaussian", "5,8", []Choice{{"gaussian", 5}, {"gaussian", 8}, {"shells", 5}, {"shells", 8}}},
		{"eggbox,rosenbrock", "2,6", []Choice{{"eggbox", 2}, {"rosenbrock", 2}, {"rosenbrock", 6}}},
		{"gaussian", "", []Choice{{"gaussian", 2}, {"gaussian", 8}, {"gaussian", 16}, {"gaussian", 32}}},
		{"cavity", "", []Choice{{"cavity", 4}}},
	} {
		got, err := Choose(tc.names, tc.dims)
		if err != nil || !slices.Equal(got, tc.want) {
			t.Errorf("%s in %s: %v, %v; want %v", tc.names, tc.dims, got, err, tc.want)
		}
	}
	// Without names, problems that do not take a dimension are left out.
	got, err := Choose("", "64")
	if err != nil || len(got) == 0 || slices.Contains(got, Choice{Cavity, 64}) || !slices.Contains(got, Choice{"gaussian", 64}) {
		t.Errorf("64 dimensions: %v, %v", got, err)
	}
	all, err := Choose("", "")
	if err != nil || len(all) < 20 {
		t.Errorf("no options: %d problems, %v; want 20 or more", len(all), err)
	}
}
