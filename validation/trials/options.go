package trials

import (
	"fmt"
	"math"
	"strconv"
	"strings"
)

// Whole reads a whole number within limits. Its errors say the option, what was
// found and what would be accepted.
func Whole(option, text string, least, most int) (int, error) {
	n, err := strconv.Atoi(text)
	if err != nil || n < least || n > most {
		return 0, fmt.Errorf("%s = %q, want a whole number from %d to %d", option, text, least, most)
	}
	return n, nil
}

// Wholes reads a list of different whole numbers, separated by commas.
func Wholes(option, text string, least, most int) ([]int, error) {
	var list []int
	for _, one := range strings.Split(text, ",") {
		n, err := Whole(option, one, least, most)
		if err != nil {
			return nil, err
		}
		for _, before := range list {
			if n == before {
				return nil, fmt.Errorf("%s has %d twice, want each number once", option, n)
			}
		}
		list = append(list, n)
	}
	return list, nil
}

// Seed reads the key of all random numbers.
func Seed(text string) (uint64, error) {
	n, err := strconv.ParseUint(text, 10, 64)
	if err != nil {
		return 0, fmt.Errorf("--seed = %q, want a whole number from 0 to %d", text, uint64(math.MaxUint64))
	}
	return n, nil
}

// Real reads a number within limits.
func Real(option, text string, least, most float64) (float64, error) {
	x, err := strconv.ParseFloat(text, 64)
	if err != nil || !(x >= least && x <= most) {
		return 0, fmt.Errorf("%s = %q, want a number from %g to %g", option, text, least, most)
	}
	return x, nil
}
