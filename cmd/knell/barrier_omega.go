package main

import (
	"fmt"
	"math"
	"slices"
	"strconv"
	"strings"
)

// maxFrequencies bounds how many frequencies one command line may ask for.
const maxFrequencies = 100000

// frequencyList is what --omega asks for.
type frequencyList struct {
	values []float64 // in the order given
	// spanned says that there was a range; low and high enclose all ranges.
	spanned   bool
	low, high float64
}

// parseFrequencies reads the values of --omega: each a list, parted by commas, of
// numbers and of ranges LOW:HIGH:STEP with both ends.
func parseFrequencies(texts []string) (*frequencyList, error) {
	list := &frequencyList{low: math.Inf(1), high: math.Inf(-1)}
	for _, text := range texts {
		for entry := range strings.SplitSeq(text, ",") {
			if err := list.add(strings.TrimSpace(entry)); err != nil {
				return nil, &usageError{fmt.Sprintf("--omega %s: %v", text, err)}
			}
		}
	}
	return list, nil
}

func (list *frequencyList) add(entry string) error {
	if entry == "" {
		return fmt.Errorf("an empty entry, want numbers or LOW:HIGH:STEP parted by commas")
	}
	parts := strings.Split(entry, ":")
	numbers := make([]float64, len(parts))
	for i, part := range parts {
		x, err := strconv.ParseFloat(part, 64)
		if err != nil || math.IsNaN(x) || math.IsInf(x, 0) {
			return fmt.Errorf("%q in %s, want a finite number", part, entry)
		}
		numbers[i] = x
	}
	switch len(numbers) {
	case 1:
		if len(list.values) == maxFrequencies {
			return tooMany()
		}
		list.values = append(list.values, numbers[0])
		return nil
	case 3:
	default:
		return fmt.Errorf("%s, want a number or LOW:HIGH:STEP", entry)
	}
	low, high, step := numbers[0], numbers[1], numbers[2]
	if !(low < high) || !(step > 0) {
		return fmt.Errorf("%s, want LOW:HIGH:STEP with LOW below HIGH and STEP above zero", entry)
	}
	// The last step may miss the end by rounding.
	steps := math.Floor((high-low)/step + 1e-9)
	if !(steps < float64(maxFrequencies-len(list.values))) {
		return tooMany()
	}
	for i := range int(steps) + 1 {
		x := low
		if i > 0 {
			x = min(rounded(low+float64(i)*step, step), high)
		}
		list.values = append(list.values, x)
	}
	list.spanned = true
	list.low, list.high = min(list.low, low), max(list.high, high)
	return nil
}

func tooMany() error {
	return fmt.Errorf("more than %d frequencies, want fewer", maxFrequencies)
}

// rounded drops what rounding added below 1e-9 of a step: 0.1 + 2 * 0.1 is 0.3.
func rounded(x, step float64) float64 {
	places := 9 - int(math.Floor(math.Log10(step)))
	if places < 0 || places > 300 {
		return x
	}
	y, err := strconv.ParseFloat(strconv.FormatFloat(x, 'f', places, 64), 64)
	if err != nil {
		return x
	}
	return y
}

// span returns the frequencies of a picture's curves: the ranges asked for, or else
// from usual[0] to usual[1]; with all values inside.
func (list *frequencyList) span(usual [2]float64) (low, high float64) {
	low, high = usual[0], usual[1]
	if list.spanned {
		low, high = list.low, list.high
	}
	if len(list.values) > 0 {
		low, high = min(low, slices.Min(list.values)), max(high, slices.Max(list.values))
	}
	return low, high
}
