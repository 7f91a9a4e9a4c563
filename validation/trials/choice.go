package trials

import (
	"fmt"
	"io"
	"slices"
	"strconv"
	"strings"

	"knell/validation/problems"
)

// Choice is a problem in one dimension.
type Choice struct {
	Name string
	Dim  int
}

// Cavity is the problem that is not in package problems, because it needs the
// project's models.
const Cavity = "cavity"

// Family is a problems.Family, or the cavity, as the command line sees it.
type Family struct {
	Name        string
	Dims        []int // the usual ones
	Least, Most int
}

// Families lists all of them.
func Families() []Family {
	var fs []Family
	for _, f := range problems.Families() {
		fs = append(fs, Family{f.Name, f.Dims, f.Least, f.Most})
	}
	return append(fs, Family{Cavity, []int{4}, 4, 4})
}

// Choose lists the problems that the options --problems and --dims ask for, both
// lists separated by commas, in the order of Families. A problem that is named must
// take some of the dimensions; without names, those that do not are left out.
func Choose(names, dims string) ([]Choice, error) {
	var (
		wanted []string
		known  []string
		chosen []Choice
		ds     []int
		err    error
	)
	all := Families()
	for _, f := range all {
		known = append(known, f.Name)
	}
	if names != "" {
		wanted = strings.Split(names, ",")
	}
	for i, n := range wanted {
		if !slices.Contains(known, n) {
			return nil, fmt.Errorf("--problems has %q, want of %s", n, strings.Join(known, ", "))
		}
		if slices.Contains(wanted[:i], n) {
			return nil, fmt.Errorf("--problems has %q twice, want each name once", n)
		}
	}
	if dims != "" {
		if ds, err = Wholes("--dims", dims, 1, mostDim(all)); err != nil {
			return nil, err
		}
	}
	for _, f := range all {
		if wanted != nil && !slices.Contains(wanted, f.Name) {
			continue
		}
		taken := f.Dims
		if ds != nil {
			taken = nil
			for _, d := range ds {
				if d >= f.Least && d <= f.Most {
					taken = append(taken, d)
				}
			}
		}
		if len(taken) == 0 && wanted != nil {
			return nil, fmt.Errorf("--dims = %s, want at least one from %d to %d for %s", dims, f.Least, f.Most, f.Name)
		}
		for _, d := range taken {
			chosen = append(chosen, Choice{f.Name, d})
		}
	}
	return chosen, nil
}

// LeastLive is the least number of live points that a run can have, and MostLive a
// bound against slips.
const (
	LeastLive = 32
	MostLive  = 1_000_000
)

// CheckLive says whether live points are enough for the dimensions of all choices.
func CheckLive(live int, chosen []Choice) error {
	for _, c := range chosen {
		if least := 4 * (c.Dim + 1); live < least {
			return fmt.Errorf("--live = %d, want at least %d in the %d dimensions of %s", live, least, c.Dim, c.Name)
		}
	}
	return nil
}

// ListFamilies prints the families with their usual dimensions, for a help text.
func ListFamilies(out io.Writer) {
	for _, f := range Families() {
		var dims []string
		for _, d := range f.Dims {
			dims = append(dims, strconv.Itoa(d))
		}
		fmt.Fprintf(out, "  %-16s %s\n", f.Name, strings.Join(dims, ", "))
	}
}

func mostDim(fs []Family) int {
	m := 0
	for _, f := range fs {
		m = max(m, f.Most)
	}
	return m
}
