package main

import (
	"bytes"
	"encoding/xml"
	"errors"
	"fmt"
	"image/png"
	"io"
	"math"
	"math/cmplx"
	"os"
	"slices"
	"strings"
	"testing"

	"knell/internal/report"
	"knell/models/kerr"
)

// referenceResponse has the wave (2,2) at spin 0.7, computed independently of this
// project at 60 digits: Frobenius series at the horizon matched to asymptotic series
// at infinity (models/kerr/testdata/response.csv has the rows; the separation
// constants come from the same computation).
var referenceResponse = []struct {
	omega               float64
	odd, even, t        complex128
	greybody, separated float64
}{
	{0.1, 0.983733979729289069 - 0.179652834711324098i, 0.958143958337251326 - 0.286300260208864021i,
		0.00435164610285683715 - 0.00218123757048044008i, -7.6838938396527533138e-6, 3.8097095432271776247},
	{0.3, 0.685362398514838073 - 0.729172778816124973i, 0.353296714639538512 - 0.936267050626769479i,
		0.017829232479211477 - 0.0138957474537766483i, -0.0014145586644412287628, 3.4070290243581534403},
	{0.5, 0.0471067138595785282 - 0.896034230492955509i, -0.588236141535833146 - 0.677550460480093248i,
		-0.188969534606111974 - 0.00309479485280457202i, 0.19490361529424887227, 2.974109401635341561},
}

// close says that got is want to 1e-8 of want's size.
func closeTo(got [2]float64, want complex128) bool {
	return cmplx.Abs(complex(got[0], got[1])-want) <= 1e-8*cmplx.Abs(want)
}

func TestBarrier(t *testing.T) {
	type document struct {
		L, M             int
		Spin             float64
		Parity           string
		HorizonFrequency float64 `json:"horizon_frequency"`
		Mass             *float64
		Points           []struct {
			Omega        float64
			FrequencyHz  *float64 `json:"frequency_hz"`
			K            float64
			Reflection   [2]float64
			Transmission [2]float64
			Greybody     float64
			Separation   float64
			FromInfinity struct{ Reflection, Transmission [2]float64 } `json:"from_infinity"`
		}
	}
	for _, args := range [][]string{
		{"barrier", "--l", "2", "--m", "2", "--spin", "0.7", "--omega", "0.1,0.3,0.5", "--json"},
		{"barrier", "--json", "--spin=0.7", "--omega", "0.1", "--omega", " 0.3, 0.5 ", "--parity", "even", "--mass", "68"},
		{"barrier", "--spin", "0.7", "--omega", "0.1:0.5:0.2", "--json", "--parity", "odd"},
	} {
		t.Run(strings.Join(args, " "), func(t *testing.T) {
			status, stdout, stderr := knell(t, args...)
			if status != statusDone || stderr != "" {
				t.Fatalf("status %d, standard error %q", status, stderr)
			}
			var d document
			parse(t, stdout, &d)
			even := slices.Contains(args, "even")
			// Omega_H: testdata/geometry.csv of models/kerr, 120 digits.
			if d.L != 2 || d.M != 2 || d.Spin != 0.7 || (d.Parity == "even") != even || math.Abs(d.HorizonFrequency-0.20418368367551071443) > 1e-15 || len(d.Points) != len(referenceResponse) {
				t.Fatalf("got %+v", d)
			}
			for i, want := range referenceResponse {
				p, r := d.Points[i], want.odd
				if even {
					r = want.even
				}
				if p.Omega != want.omega || !closeTo(p.Reflection, r) || !closeTo(p.Transmission, want.t) ||
					!closeTo([2]float64{p.Greybody}, complex(want.greybody, 0)) || !closeTo([2]float64{p.Separation}, complex(want.separated, 0)) ||
					math.Abs(p.K-(want.omega-2*0.20418368367551071443)) > 1e-14 {
					t.Errorf("got %+v, want %+v", p, want)
				}
				// Waves from infinity: |R|^2 and 1 - |R|^2 are the same (flux), and
				// T is omega/k times as large (reciprocity).
				in := p.FromInfinity
				if size := math.Hypot(in.Reflection[0], in.Reflection[1]); math.Abs(size/cmplx.Abs(want.odd)-1) > 1e-8 ||
					!closeTo(in.Transmission, want.t*complex(want.omega/p.K, 0)) {
					t.Errorf("from infinity %+v", in)
				}
				if (p.FrequencyHz != nil) != even || (d.Mass != nil) != even {
					t.Errorf("frequency %v and mass %v, want them with --mass only", p.FrequencyHz, d.Mass)
				}
				// G Msun/c^3 = 4.92549094764126698e-6 s (IAU 2015 nominal solar mass).
				if hertz := want.omega / (2 * math.Pi * 68 * 4.92549094764126698e-6); even && !(math.Abs(*p.FrequencyHz/hertz-1) < 1e-14) {
					t.Errorf("%g Hz, want %g", *p.FrequencyHz, hertz)
				}
			}
		})
	}
	// Fields of the document that other programs read.
	_, stdout, _ := knell(t, "barrier", "--l", "2", "--m", "2", "--spin", "0.7", "--omega", "0.1,0.3,0.5", "--json")
	for _, key := range []string{"l", "m", "spin", "points", "omega", "reflection", "transmission", "greybody", "separation"} {
		if !strings.Contains(stdout, fmt.Sprintf("%q: ", key)) {
			t.Errorf("no key %q in\n%s", key, stdout)
		}
	}
	status, stdout, _ := knell(t, "barrier", "--spin", "0.7", "--omega", "0.1,0.5", "--mass", "68")
	if lines := strings.Split(strings.TrimSpace(stdout), "\n"); status != statusDone || len(lines) != 5 ||
		!strings.Contains(lines[1], "frequency (Hz)") || !strings.Contains(lines[4], "237.59") || !strings.Contains(lines[4], "1.94903615e-01") {
		t.Errorf("got table\n%s", stdout)
	}
}

// The ends of the domain, and what symmetry says: R_lm(-omega) = conj R_l-m(omega).
func TestBarrierDomain(t *testing.T) {
	var d, mirrored report.BarrierDocument
	for _, args := range []string{
		"--l 8 --m -8 --spin 0.998 --omega 0.5,2", "--l 2 --m 0 --spin 0 --omega 0", "--spin 0.998 --omega 1e-300,2", "--spin 0.5 --omega 0.25",
	} {
		status, stdout, stderr := knell(t, append([]string{"barrier", "--json"}, strings.Fields(args)...)...)
		if status != statusDone || strings.Contains(stdout, "null") {
			t.Errorf("%s: status %d, standard error %q, standard output\n%s", args, status, stderr, stdout)
		}
	}
	_, stdout, _ := knell(t, "barrier", "--json", "--l", "3", "--m", "2", "--spin", "0.6", "--omega", "-0.4")
	parse(t, stdout, &d)
	_, stdout, _ = knell(t, "barrier", "--json", "--l", "3", "--m", "-2", "--spin", "0.6", "--omega", "0.4")
	parse(t, stdout, &mirrored)
	p, q := d.Points[0], mirrored.Points[0]
	if p.Reflection[0] != q.Reflection[0] || p.Reflection[1] != -q.Reflection[1] || p.Omega != -0.4 {
		t.Errorf("got %+v and %+v, want conjugates", p, q)
	}
}

func TestBarrierUsage(t *testing.T) {
	for _, tc := range []struct{ args, want string }{
		{"", "--spin, from 0 to 0.998"},
		{"--spin 0.7", fmt.Sprintf("--omega, frequencies from -%g to %g", kerr.MaxFrequency, kerr.MaxFrequency)},
		{"--omega 0.1", "--spin, from 0 to 0.998"},
		{"--spin 0.7 --omega", "--omega wants a value"},
		{"--spin 0.999 --omega 0.1", "spin = 0.999, want 0 to 0.998"},
		{"--spin nan --omega 0.1", "spin = NaN, want 0 to 0.998"},
		{"--spin -1 --omega 0.1", "spin = -1, want 0 to 0.998"},
		{"--spin fast --omega 0.1", `--spin = "fast", want a number`},
		{"--spin 0.7 --omega 5", "Mω = 5, want -"},
		{"--spin 0.7 --omega inf", `"inf" in inf, want a finite number`},
		{"--spin 0.7 --omega nan", "want a finite number"},
		{"--spin 0.7 --omega 1e400", "want a finite number"},
		{"--spin 0.7 --omega 0.1,x", `--omega 0.1,x: "x" in x, want a finite number`},
		{"--spin 0.7 --omega 0.1,,0.2", "an empty entry, want numbers or LOW:HIGH:STEP"},
		{"--spin 0.7 --omega 0.1;0.2", "want a finite number"},
		{"--spin 0.7 --omega 0.1:0.2", "0.1:0.2, want a number or LOW:HIGH:STEP"},
		{"--spin 0.7 --omega 0.2:0.1:0.01", "LOW below HIGH"},
		{"--spin 0.7 --omega 0.1:0.2:0", "STEP above zero"},
		{"--spin 0.7 --omega 0.1:0.2:-1", "STEP above zero"},
		{"--spin 0.7 --omega 0:1:nan", "want a finite number"},
		{"--spin 0.7 --omega 0:1:1e-9", "more than 100000 frequencies"},
		{"--spin 0.7 --omega -1e308:1e308:1e-308", "more than 100000 frequencies"},
		{"--spin 0.7 --omega 0.1 --l 9", "l = 9"},
		{"--spin 0.7 --omega 0.1 --l 1", "l = 1"},
		{"--spin 0.7 --omega 0.1 --m 3", "m = 3"},
		{"--spin 0.7 --omega 0.1 --m two", `--m = "two", want a whole number`},
		{"--spin 0.7 --omega 0.1 --parity odd,even", `--parity = "odd,even", want odd or even`},
		{"--spin 0.7 --omega 0.1 --mass 0", "--mass = 0, want a finite number of solar masses above zero"},
		{"--spin 0.7 --omega 0.1 --mass nan", "--mass = NaN"},
		{"--spin 0.7 --omega 0.1 --mass +inf", "--mass = +Inf"},
		{"--spin 0.7 --omega 0.1 --plot a.pdf", "--plot a.pdf, want a file name that ends in .svg or .png"},
		{"--spin 0.7 --omega 0.1 --plot gone/a.svg", "no directory gone"},
		{"--spin 0.7 --omega 0.1 --replace", "--replace without --plot"},
		{"--spin 0.7 --omega 0.1 extra", "barrier takes no argument, found extra"},
		{"--spin 0.7 --omega 0.1 --frobnicate", "no option --frobnicate"},
	} {
		checkUsage(t, "barrier", tc.args, tc.want)
	}
}

// checkUsage holds that a command line is refused with one line that says why.
func checkUsage(t *testing.T, command, args, want string) {
	t.Helper()
	status, stdout, stderr := knell(t, append([]string{command}, strings.Fields(args)...)...)
	line, rest, _ := strings.Cut(stderr, "\n")
	if status != statusUsage || stdout != "" || rest != "" || !strings.HasPrefix(line, "knell: ") || !strings.Contains(line, want) || strings.Contains(line, "kerr:") {
		t.Errorf("knell %s %s: status %d, standard output %q, standard error %q; want status %d and one line with %q", command, args, status, stdout, stderr, statusUsage, want)
	}
}

func TestFrequencyList(t *testing.T) {
	for _, tc := range []struct {
		texts []string
		want  []float64
	}{
		{[]string{"0.1,0.3,0.5"}, []float64{0.1, 0.3, 0.5}},
		{[]string{"0.5", "0.1, -2"}, []float64{0.5, 0.1, -2}},
		// Decimal steps, both ends: no 0.30000000000000004, and no point beyond 2.
		{[]string{"0.1:0.5:0.1"}, []float64{0.1, 0.2, 0.3, 0.4, 0.5}},
		{[]string{"1.9:2:0.1"}, []float64{1.9, 2}},
		{[]string{"0:0.3:0.1"}, []float64{0, 0.1, 0.2, 0.3}}, // 0.3/0.1 is below 3
		{[]string{"0:1:0.4,7"}, []float64{0, 0.4, 0.8, 7}},
		{[]string{"-1e-20:1e-20:1e-20"}, []float64{-1e-20, 0, 1e-20}},
	} {
		list, err := parseFrequencies(tc.texts)
		if err != nil || !slices.Equal(list.values, tc.want) {
			t.Errorf("%q: %v, %v; want %v", tc.texts, list, err, tc.want)
		}
	}
	list, err := parseFrequencies([]string{"0.001:2:0.001"})
	if err != nil || len(list.values) != 2000 || list.values[1999] != 2 {
		t.Errorf("%d values, %v; want 2000 up to 2", len(list.values), err)
	}
	if low, high := list.span([2]float64{0, 1}); low != 0.001 || high != 2 {
		t.Errorf("span %g to %g, want that of the range", low, high)
	}
	list, _ = parseFrequencies([]string{"0.5,1.5"})
	if low, high := list.span([2]float64{0, 1}); low != 0 || high != 1.5 {
		t.Errorf("span %g to %g, want 0 to 1.5", low, high)
	}
}

func TestPlots(t *testing.T) {
	t.Chdir(t.TempDir())
	for _, tc := range []struct {
		file string
		args string
	}{
		{"barrier.svg", "barrier --l 2 --m 2 --spin 0.7 --omega 0.1,0.3,0.5 --json"},
		{"barrier.png", "barrier --spin 0.998 --l 3 --m -3 --omega -2:2:0.5 --mass 1e-3"},
		{"faint.svg", "barrier --spin 0 --l 8 --m 0 --omega 1e-9:2e-9:1e-9 --mass 1e-320"},
		{"echo.svg", "echo --mass 68 --spin 0.67 --offset 0 --json"},
		{"echo.png", "echo --mass 1e10 --spin 0.998 --gap 1e-300 --l 4 --m 4 --n 3"},
		{"near.svg", "echo --mass 68 --spin 0 --gap 0.49 --law constant,reflectivity=0 --echoes 100"},
	} {
		t.Run(tc.file, func(t *testing.T) {
			args := append(strings.Fields(tc.args), "--plot", tc.file)
			status, stdout, stderr := knell(t, args...)
			if status != statusDone {
				t.Fatalf("status %d, standard error %q", status, stderr)
			}
			if slices.Contains(args, "--json") {
				var d any
				parse(t, stdout, &d)
				stdout = stderr
			}
			if !strings.HasSuffix(stdout, "written to "+tc.file+"\n") {
				t.Errorf("%q does not name the file", stdout)
			}
			first := checkPictureFile(t, tc.file)
			if status, stdout, stderr := knell(t, args...); status != statusUsage || stdout != "" || !strings.Contains(stderr, "exists, want another name, or --replace") {
				t.Errorf("status %d, %q, %q: overwrites unasked", status, stdout, stderr)
			}
			if status, _, stderr := knell(t, append(args, "--replace")...); status != statusDone {
				t.Errorf("status %d, %q: does not replace", status, stderr)
			}
			if !bytes.Equal(first, checkPictureFile(t, tc.file)) {
				t.Error("the same command draws another picture")
			}
		})
	}
}

// checkPictureFile holds that a file is XML or PNG, as its name says.
func checkPictureFile(t *testing.T, name string) []byte {
	t.Helper()
	data, err := os.ReadFile(name)
	if err != nil {
		t.Fatal(err)
	}
	if strings.HasSuffix(name, ".png") {
		if _, err := png.Decode(bytes.NewReader(data)); err != nil {
			t.Error(err)
		}
		return data
	}
	for decoder := xml.NewDecoder(bytes.NewReader(data)); ; {
		if _, err := decoder.Token(); errors.Is(err, io.EOF) {
			break
		} else if err != nil {
			t.Fatal(err)
		}
	}
	if !bytes.Contains(data, []byte("<svg")) || bytes.Contains(data, []byte("NaN")) || bytes.Contains(data, []byte("Inf")) {
		t.Errorf("%s is no sound picture", name)
	}
	return data
}
