package report

import (
	"bytes"
	"encoding/xml"
	"errors"
	"image/png"
	"io"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"gonum.org/v1/plot"
)

// somePictures are the pictures of ordinary documents and of the worst ones that
// numbers allow.
func somePictures() map[string]Picture {
	line := someBarrier().Points
	nan, inf := Number(math.NaN()), Number(math.Inf(1))
	wild := &BarrierDocument{L: 8, M: -8, Spin: 0.998, Parity: "even", HorizonFrequency: 0.4, Mass: &inf}
	for _, x := range []Number{nan, inf, -inf, 0, 1e308, -1e308, 5e-324} {
		at := x
		wild.Points = append(wild.Points, BarrierPoint{Omega: x, Frequency: &at, Reflection: [2]Number{x, x}, Greybody: x})
	}
	flat := &BarrierDocument{Points: []BarrierPoint{{Omega: 1, Reflection: [2]Number{1, 0}, Greybody: 1}}}
	loud := someEcho()
	loud.EchoDelay, loud.Mode.Frequency = 1e300, 1e-300
	loud.Laws[0].Echoes = []Number{1e300, inf, nan, 0, -1}
	return map[string]Picture{
		"barrier":         BarrierPicture(someBarrier(), line),
		"empty barrier":   BarrierPicture(&BarrierDocument{}, nil),
		"one frequency":   BarrierPicture(flat, flat.Points),
		"wild barrier":    BarrierPicture(wild, wild.Points),
		"echo":            EchoPicture(someEcho(), someEchoCurves()),
		"empty echo":      EchoPicture(&EchoDocument{}, &EchoCurves{}),
		"echo of extreme": EchoPicture(loud, &EchoCurves{Frequency: []float64{0, math.Inf(1)}, Barrier: []float64{math.NaN(), 0}, Ratio: [][]float64{{1e300, 1e-300}}}),
	}
}

func TestPicturesAreSound(t *testing.T) {
	dir := t.TempDir()
	for name, p := range somePictures() {
		t.Run(name, func(t *testing.T) {
			vector, raster := filepath.Join(dir, "a.svg"), filepath.Join(dir, "a.PNG")
			if err := WritePicture(vector, p, true); err != nil {
				t.Fatal(err)
			}
			text, err := os.ReadFile(vector)
			if err != nil {
				t.Fatal(err)
			}
			decoder, elements := xml.NewDecoder(bytes.NewReader(text)), 0
			for {
				token, err := decoder.Token()
				if errors.Is(err, io.EOF) {
					break
				}
				if err != nil {
					t.Fatal(err)
				}
				if _, ok := token.(xml.StartElement); ok {
					elements++
				}
			}
			if elements < 20 || !bytes.Contains(text, []byte("<title>"+p.page.title+"</title>")) {
				t.Errorf("%d elements, want a picture with its title", elements)
			}
			if bytes.Contains(text, []byte("NaN")) || bytes.Contains(text, []byte("Inf")) {
				t.Errorf("a coordinate is not a number:\n%s", text)
			}
			again, err := p.render("svg")
			if err != nil || !bytes.Equal(again, text) {
				t.Errorf("the same picture gives other bytes (%v)", err)
			}
			if strings.HasPrefix(name, "e") {
				return // half of the pictures will do: pixels are slow
			}
			if err := WritePicture(raster, p, true); err != nil {
				t.Fatal(err)
			}
			f, err := os.Open(raster)
			if err != nil {
				t.Fatal(err)
			}
			defer f.Close()
			image, err := png.Decode(f)
			if err != nil {
				t.Fatal(err)
			}
			// 510 points at 200 to the inch of 72 points.
			if got := image.Bounds().Dx(); got < 1416 || got > 1418 {
				t.Errorf("%d pixels wide, want 1417", got)
			}
		})
	}
}

// A picture drawn twice from equal documents is equal: nothing in it depends on the
// order of a map or on the clock.
func TestPicturesRepeat(t *testing.T) {
	first, err := EchoPicture(someEcho(), someEchoCurves()).render("png")
	if err != nil {
		t.Fatal(err)
	}
	second, err := EchoPicture(someEcho(), someEchoCurves()).render("png")
	if err != nil || !bytes.Equal(first, second) {
		t.Errorf("two pictures differ (%v)", err)
	}
}

func TestPictureFiles(t *testing.T) {
	dir := t.TempDir()
	taken := filepath.Join(dir, "taken.svg")
	if err := os.WriteFile(taken, []byte("kept"), 0o644); err != nil {
		t.Fatal(err)
	}
	if err := os.Mkdir(filepath.Join(dir, "folder.svg"), 0o755); err != nil {
		t.Fatal(err)
	}
	picture := EchoPicture(someEcho(), someEchoCurves())
	for _, tc := range []struct {
		name    string
		replace bool
		want    string
	}{
		{"taken.svg", false, "exists, want another name, or --replace"},
		{"a.pdf", false, "want a file name that ends in .svg or .png"},
		{"svg", false, "want a file name that ends in .svg or .png"},
		{"folder.svg", true, "is a directory"},
		{filepath.Join("gone", "a.svg"), true, "no directory"},
		{filepath.Join("taken.svg", "a.svg"), true, "no directory"},
	} {
		err := WritePicture(filepath.Join(dir, tc.name), picture, tc.replace)
		if err == nil || !strings.Contains(err.Error(), tc.want) {
			t.Errorf("%s: %v, want %q", tc.name, err, tc.want)
		}
	}
	if text, err := os.ReadFile(taken); err != nil || string(text) != "kept" {
		t.Errorf("%v, %q: overwritten unasked", err, text)
	}
	if err := WritePicture(taken, picture, true); err != nil {
		t.Error(err)
	}
	if text, err := os.ReadFile(taken); err != nil || !bytes.HasPrefix(text, []byte("<?xml")) {
		t.Errorf("%v, %.20q: not replaced", err, text)
	}
	if left, err := os.ReadDir(dir); err != nil || len(left) != 2 {
		t.Errorf("%v, %v: files left behind", err, left)
	}
}

func TestTicks(t *testing.T) {
	named := func(ticker func(low, high float64) []plot.Tick) func(low, high float64) []string {
		return func(low, high float64) (names []string) {
			for _, tick := range ticker(low, high) {
				if !tick.IsMinor() {
					names = append(names, tick.Label)
				}
			}
			return names
		}
	}
	even, decades := named(evenTicks), named(decadeTicks)
	for _, tc := range []struct {
		ticks     func(low, high float64) []string
		low, high float64
		want      string
	}{
		{even, 0, 1, "0 0.2 0.4 0.6 0.8 1"},
		{even, 0.1, 0.35, "0.1 0.15 0.2 0.25 0.3 0.35"},
		{even, 0, 0.8, "0 0.1 0.2 0.3 0.4 0.5 0.6 0.7 0.8"},
		{even, -3, 500, "0 100 200 300 400 500"},
		{even, 1e-20, 7e-20, "1e-20 2e-20 3e-20 4e-20 5e-20 6e-20 7e-20"},
		{decades, 0.001, 1, "1e-3 0.01 0.1 1"},
		{decades, 0.15, 4, "0.2 0.5 1 2"},
		{decades, 1e-16, 2, "1e-15 1e-12 1e-9 1e-6 1e-3 1"},
	} {
		if got := strings.Join(tc.ticks(tc.low, tc.high), " "); got != tc.want {
			t.Errorf("from %g to %g: %s, want %s", tc.low, tc.high, got, tc.want)
		}
	}
	// Any range that axis.sound lets through has ticks, and not too many.
	for _, log := range []bool{false, true} {
		for _, ends := range [][2]float64{{1e-300, 1e300}, {-1e300, 1e300}, {5, 5}, {0, 0}, {3, 2}, {math.Inf(-1), 1}, {math.NaN(), 1}, {1, 1 + 1e-15}, {0, 5e-324}} {
			a := axis{low: ends[0], high: ends[1], log: log}.sound()
			names := even(a.low, a.high)
			if log {
				names = decades(a.low, a.high)
			}
			if len(names) < 2 || len(names) > maxTicks+2 {
				t.Errorf("from %g to %g (log %t): ticks %v", ends[0], ends[1], log, names)
			}
		}
	}
}
