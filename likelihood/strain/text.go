package strain

import (
	"bufio"
	"compress/gzip"
	"fmt"
	"io"
	"math"
	"os"
	"regexp"
	"strconv"
	"strings"
)

// maxSamples is the most samples a text file may give: 4096 s at 65536 Hz. It
// keeps a small compressed file from filling the memory.
const maxSamples = 1 << 28

// The header lines of text files. Keys are of our own; the sentences are those
// of open-data text files (from memory).
var (
	headerKey    = regexp.MustCompile(`^(start|rate|site)\s*[=:]\s*(\S+)$`)
	headerRate   = regexp.MustCompile(`\b(\d+) samples per second\b`)
	headerStart  = regexp.MustCompile(`\bstarting GPS (\d+)\b`)
	decimalValue = regexp.MustCompile(`^\d{1,11}(\.\d+)?$`)
)

// readText opens a text file for ReadText.
func readText(path, site string) (*Series, error) {
	file, err := os.Open(path)
	if err != nil {
		return nil, err
	}
	defer file.Close()
	var r io.Reader = file
	if strings.HasSuffix(strings.ToLower(path), ".gz") {
		z, err := gzip.NewReader(file)
		if err != nil {
			return nil, fmt.Errorf("%s: got %v, want gzip-compressed text", path, err)
		}
		defer z.Close()
		r = z
	}
	return ReadText(r, path, site)
}

// ReadText reads strain as text, one sample per line, in one of two forms:
//
//   - one column: the strain, after header lines that begin with # and give the
//     start and the rate, as "# start = 1400000000" (GPS s) and "# rate = 4096"
//     (Hz), or in the words "4096 samples per second" and "starting GPS
//     1400000000" of open-data text files;
//   - two columns, separated by a comma or blanks: the GPS time in s as a plain
//     decimal number, and the strain. A first line "time,strain" is skipped.
//     Times must be evenly spaced to a hundredth of a sample, at a whole number
//     of samples per second. Header lines may be there, and must agree.
//
// "# site = H1" may name the site; without it the file has the site that is
// asked for. Other lines that begin with # are skipped. A value may be nan: a
// gap. An empty line, a third column or a header line after the first sample is
// an error with its line number.
func ReadText(r io.Reader, name, site string) (*Series, error) {
	t := &textReader{name: name, s: &Series{File: name, Site: site}}
	scanner := bufio.NewScanner(r)
	for scanner.Scan() {
		t.line++
		if err := t.read(strings.TrimSpace(scanner.Text())); err != nil {
			return nil, err
		}
	}
	if err := scanner.Err(); err != nil {
		return nil, fmt.Errorf("%s:%d: got %v, want lines of text up to the end of the file", name, t.line+1, err)
	}
	return t.finish()
}

type textReader struct {
	name    string
	line    int
	s       *Series
	columns int
	times   []float64 // s after StartSeconds, when there are two columns
	rate    float64   // Hz, from the header, or 0
	start   string    // GPS s, from the header, or ""
}

func (t *textReader) fail(got, want string) error {
	return fmt.Errorf("%s:%d: got %s, want %s", t.name, t.line, got, want)
}

func (t *textReader) read(line string) error {
	if strings.HasPrefix(line, "#") {
		if t.columns != 0 {
			return t.fail("a header line after the first sample", "a sample")
		}
		return t.header(strings.TrimSpace(line[1:]))
	}
	if t.columns == 0 && line == "time,strain" {
		return nil
	}
	fields := strings.FieldsFunc(line, func(r rune) bool { return r == ' ' || r == '\t' || r == ',' })
	if t.columns == 0 {
		t.columns = len(fields)
		t.s.Values = make([]float64, 0, 4096)
	}
	if len(fields) != t.columns || t.columns < 1 || t.columns > 2 {
		want := "one (strain) or two (time, strain)"
		if t.columns == 1 || t.columns == 2 {
			want = fmt.Sprintf("%d, as in the first sample", t.columns)
		}
		return t.fail(fmt.Sprintf("%d columns", len(fields)), want)
	}
	if len(t.s.Values) == maxSamples {
		return t.fail("yet another sample", fmt.Sprintf("at most %d", maxSamples))
	}
	text := fields[t.columns-1]
	v, err := strconv.ParseFloat(text, 64)
	if err != nil {
		return t.fail(fmt.Sprintf("strain %.40q", text), "a number")
	}
	t.s.Values = append(t.s.Values, v)
	if t.columns == 1 {
		return nil
	}
	whole, fraction, err := t.gps(fields[0])
	if err != nil {
		return err
	}
	if len(t.times) == 0 {
		t.s.StartSeconds, t.s.StartFraction = whole, fraction
	}
	t.times = append(t.times, float64(whole-t.s.StartSeconds)+fraction)
	return nil
}

// gps reads a GPS time in two parts, so that no digit is lost.
func (t *textReader) gps(text string) (int64, float64, error) {
	if !decimalValue.MatchString(text) {
		return 0, 0, t.fail(fmt.Sprintf("time %.40q", text), "a GPS time in s, such as 1400000000.25")
	}
	a, b, _ := strings.Cut(text, ".")
	whole, err := strconv.ParseInt(a, 10, 64)
	if err != nil {
		return 0, 0, t.fail(fmt.Sprintf("time %.40q", text), "a GPS time in s")
	}
	fraction, err := strconv.ParseFloat("0."+b+"0", 64)
	if err != nil || fraction >= 1 {
		return 0, 0, t.fail(fmt.Sprintf("time %.40q", text), "a GPS time in s")
	}
	return whole, fraction, nil
}

func (t *textReader) header(line string) error {
	key, value := "", ""
	if m := headerKey.FindStringSubmatch(line); m != nil {
		key, value = m[1], m[2]
	}
	if m := headerRate.FindStringSubmatch(line); m != nil {
		if err := t.set("rate", m[1]); err != nil {
			return err
		}
	}
	if m := headerStart.FindStringSubmatch(line); m != nil {
		if err := t.set("start", m[1]); err != nil {
			return err
		}
	}
	return t.set(key, value)
}

func (t *textReader) set(key, value string) error {
	switch key {
	case "start":
		if t.start != "" && t.start != value {
			return t.fail("start "+value, "the same as before, "+t.start)
		}
		t.start = value
		_, _, err := t.gps(value)
		return err
	case "rate":
		rate, err := strconv.ParseFloat(value, 64)
		if err != nil || rate < 1 || rate > 1<<20 || rate != math.Floor(rate) || t.rate != 0 && rate != t.rate {
			return t.fail(fmt.Sprintf("rate %.40q", value), fmt.Sprintf("one whole number of samples per second from 1 to %d", 1<<20))
		}
		t.rate = rate
	case "site":
		if t.s.Site != "" && value != t.s.Site {
			return t.fail(fmt.Sprintf("strain of site %.40q", value), fmt.Sprintf("%q", t.s.Site))
		}
		t.s.Site = value
	}
	return nil
}

func (t *textReader) finish() (*Series, error) {
	n := len(t.s.Values)
	if n == 0 {
		return nil, t.fail("the end of the file", "samples")
	}
	if t.columns == 1 {
		if t.rate == 0 || t.start == "" {
			return nil, fmt.Errorf("%s:1: got one column without start and rate, want header lines such as %q and %q", t.name,
				"# start = 1400000000", "# rate = 4096")
		}
		t.s.SampleRate = t.rate
		var err error
		t.s.StartSeconds, t.s.StartFraction, err = t.gps(t.start)
		return t.s, err
	}
	if n < 2 {
		return nil, t.fail("one sample", "at least two, to tell the rate")
	}
	first := t.times[0]
	rate := math.Round(float64(n-1) / (t.times[n-1] - first))
	if !(rate >= 1 && rate <= 1<<20) || t.rate != 0 && t.rate != rate {
		return nil, t.fail(fmt.Sprintf("times that rise by %v s in %d samples", t.times[n-1]-first, n-1),
			"a whole number of samples per second, that of the header if it gives one")
	}
	for i, x := range t.times {
		if math.Abs((x-first)*rate-float64(i)) > 1e-2 {
			// Samples are on consecutive lines that end at the last one.
			t.line -= n - 1 - i
			return nil, t.fail(fmt.Sprintf("time %.9f s after the first sample", x-first),
				fmt.Sprintf("%.9f at %v Hz", float64(i)/rate, rate))
		}
	}
	t.s.SampleRate = rate
	if t.start != "" {
		whole, fraction, err := t.gps(t.start)
		if err != nil {
			return nil, err
		}
		if d := float64(whole-t.s.StartSeconds) + fraction - t.s.StartFraction; math.Abs(d)*rate > 1e-2 {
			return nil, fmt.Errorf("%s:1: got start %s, want the first sample's time, %.9f", t.name, t.start, t.s.Start())
		}
	}
	return t.s, nil
}
