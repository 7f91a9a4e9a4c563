package kerr

import (
	"fmt"
	"math"
	"math/cmplx"
	"testing"

	"knell/internal/checktable"
	"knell/internal/constants"
	"knell/internal/random"
)

// independentModes are the rows of qnm.csv and overtones.csv, with their file.
func independentModes(t *testing.T) (rows []map[string]float64, sources []string) {
	for _, name := range []string{"qnm.csv", "overtones.csv"} {
		for _, row := range readTable(t, name) {
			rows, sources = append(rows, row), append(sources, "testdata/"+name)
		}
	}
	return rows, sources
}

// TestPhysicsModes compares frequencies with numbers computed at 34 to 110 digits
// by two other methods; see testdata/qnm.csv and testdata/overtones.csv.
func TestPhysicsModes(t *testing.T) {
	table := checktable.New(t, "quasi-normal modes Mω against independent calculations")
	worst := -1.0
	rows, sources := independentModes(t)
	for i, row := range rows {
		l, m, n, spin := int(row["l"]), int(row["m"]), int(row["n"]), row["a"]
		want := complex(row["re_omega"], row["im_omega"])
		got, err := QuasiNormalMode(l, m, n, spin)
		if err != nil {
			t.Error(err)
			continue
		}
		table.Complex(fmt.Sprintf("Mω (%d,%d,%d) spin %g", l, m, n, spin), got.Omega, want, 1e-13, sources[i])
		tabulated, err := TabulatedMode(l, m, n, spin)
		if err != nil {
			t.Error(err)
			continue
		}
		worst = max(worst, cmplx.Abs(tabulated.Omega/want-1))
	}
	table.Worst("Mω from the embedded table, relative", worst, 1e-11, "both files")
}

// TestPhysicsSeparationConstants does the same for A, by three roads: the
// continued fraction, the table, and the eigenvalue of the spectral matrix.
func TestPhysicsSeparationConstants(t *testing.T) {
	table := checktable.New(t, "separation constants against independent calculations")
	worst, spectral := -1.0, -1.0
	rows, sources := independentModes(t)
	for i, row := range rows {
		l, m, n, spin := int(row["l"]), int(row["m"]), int(row["n"]), row["a"]
		want := complex(row["re_A"], row["im_A"])
		got, err := QuasiNormalMode(l, m, n, spin)
		if err != nil {
			t.Error(err)
			continue
		}
		table.Complex(fmt.Sprintf("A (%d,%d,%d) spin %g", l, m, n, spin), got.Separation, want, 1e-12, sources[i])
		tabulated, err := TabulatedMode(l, m, n, spin)
		if err != nil {
			t.Error(err)
			continue
		}
		worst = max(worst, cmplx.Abs(tabulated.Separation/want-1))
		h, err := newHarmonic(l, m, complex(spin*row["re_omega"], spin*row["im_omega"]))
		if err != nil {
			t.Error(err)
			continue
		}
		spectral = max(spectral, cmplx.Abs(h.separation/want-1))
	}
	table.Worst("A from the embedded table, relative", worst, 1e-11, "both files")
	table.Worst("A as a spectral eigenvalue, relative", spectral, 1e-12, "both files")
}

// TestPhysicsPrintedModes compares with the printed table of Proc. R. Soc. A 402,
// 285 (1985), in its units 2M = 1 and with its six decimals.
func TestPhysicsPrintedModes(t *testing.T) {
	table := checktable.New(t, "2Mω without spin against the printed table")
	for l, rows := range [][]complex128{
		2: {0.747343 - 0.177925i, 0.693422 - 0.547830i, 0.602107 - 0.956554i, 0.503010 - 1.410296i,
			0.415029 - 1.893690i, 0.338599 - 2.391216i, 0.266505 - 2.895822i},
		3: {1.198887 - 0.185406i, 1.165288 - 0.562596i, 1.103370 - 0.958186i, 1.023924 - 1.380674i},
		4: {1.618357 - 0.188328i, 1.593263 - 0.568669i},
	} {
		for n, want := range rows {
			got, err := QuasiNormalMode(l, 0, n, 0)
			if err != nil {
				t.Error(err)
				continue
			}
			// Half a unit of the last place; the last row of l = 2 is printed one
			// unit off.
			tol := 0.51e-6
			if l == 2 && n == 6 {
				tol = 1.01e-6
			}
			name := fmt.Sprintf("ω (l=%d, n=%d)", l, n)
			const source = "Proc. R. Soc. A 402, 285, from memory"
			table.Absolute("Re 2M"+name, 2*real(got.Omega), real(want), tol, source)
			table.Absolute("Im 2M"+name, 2*imag(got.Omega), imag(want), tol, source)
		}
	}
}

// TestPhysicsModeFits takes fits in spin for what they are: their largest errors
// over 0 to 0.99 must come out, to the digits that they are known to.
func TestPhysicsModeFits(t *testing.T) {
	table := checktable.New(t, "largest errors, in per cent, of the fits of arXiv:gr-qc/0512160 over spins 0 to 0.99")
	for _, row := range readTable(t, "spinfits.csv") {
		l, m, n := int(row["l"]), int(row["m"]), int(row["n"])
		var worstF, worstQ float64
		const steps = 990
		for i := range steps + 1 {
			spin := 0.99 * float64(i) / steps
			mode, err := TabulatedMode(l, m, n, spin)
			if err != nil {
				t.Fatal(err)
			}
			f := row["f1"] + row["f2"]*math.Pow(1-spin, row["f3"])
			q := row["q1"] + row["q2"]*math.Pow(1-spin, row["q3"])
			worstF = max(worstF, math.Abs(f/real(mode.Omega)-1))
			worstQ = max(worstQ, math.Abs(q/(-real(mode.Omega)/(2*imag(mode.Omega)))-1))
		}
		name := fmt.Sprintf("(%d,%d,%d)", l, m, n)
		// Half a unit of the last place.
		table.Absolute("error of F "+name, 100*worstF, row["worst_f"], 0.0051, "testdata/spinfits.csv")
		table.Absolute("error of Q "+name, 100*worstQ, row["worst_q"], 0.0051, "testdata/spinfits.csv")
	}
}

// TestPhysicsRemnantOf68 is a worked value, computed independently of this
// package: 68 solar masses (redshifted) and spin 0.68.
func TestPhysicsRemnantOf68(t *testing.T) {
	table := checktable.New(t, "the (2,2,0) mode of 68 solar masses, spin 0.68")
	mode, err := QuasiNormalMode(2, 2, 0, 0.68)
	if err != nil {
		t.Fatal(err)
	}
	const mass = 68 * constants.SolarMassSeconds
	const source = "computed independently, printed digits"
	table.Absolute("frequency, Hz", real(mode.Omega)/(2*math.Pi*mass), 248.985, 0.00051, source)
	table.Absolute("damping time, ms", -1e3*mass/imag(mode.Omega), 4.1090, 0.000051, source)
}

// TestPhysicsModeSymmetry: turning the black hole around exchanges m and -m, so
// at no spin the families meet, and at small spin ω = ω0 + m a ω1 + O(a²) with
// the same ω1 for every m.
func TestPhysicsModeSymmetry(t *testing.T) {
	table := checktable.New(t, "co- and counter-rotating families at small spin")
	const small = 1e-5
	meet, odd, linear := 0.0, 0.0, 0.0
	for l := minMultipole; l <= maxMultipole; l++ {
		for n := 0; n <= maxOvertone; n++ {
			at := func(m int, spin float64) complex128 {
				mode, err := QuasiNormalMode(l, m, n, spin)
				if err != nil {
					t.Fatal(err)
				}
				return mode.Omega
			}
			zero := at(0, 0)
			slope := (at(l, small) - at(-l, small)) / complex(2*float64(l)*small, 0)
			for m := -l; m <= l; m++ {
				meet = max(meet, cmplx.Abs(at(m, 0)-zero))
				odd = max(odd, cmplx.Abs(at(m, small)+at(-m, small)-2*zero))
				linear = max(linear, cmplx.Abs(at(m, small)-zero-complex(float64(m)*small, 0)*slope))
			}
		}
	}
	const source = "symmetry of the equations under a, m → -a, -m"
	table.Worst("ω_lmn - ω_l0n at spin 0", meet, 1e-14, source)
	// Without the symmetry the first order would leave 1e-6; the second is left.
	table.Worst("ω_lmn + ω_l-mn - 2ω_ln(0) at spin 1e-5", odd, 20*small*small, source)
	table.Worst("ω_lmn - ω_ln(0) - m a ω1 at spin 1e-5", linear, 20*small*small, source)
}

// TestQuasiNormalModeAnywhere draws modes and spins: each decays, oscillates to
// the positive side and has a separation constant near the sphere's.
func TestQuasiNormalModeAnywhere(t *testing.T) {
	rng := random.New(1, "modes anywhere")
	for range 150 {
		l := minMultipole + rng.IntN(maxMultipole-minMultipole+1)
		m, n := rng.IntN(2*l+1)-l, rng.IntN(maxOvertone+1)
		spin := math.Tanh(math.Atanh(MaxSpin) * rng.Float64())
		mode, err := QuasiNormalMode(l, m, n, spin)
		if err != nil {
			t.Error(err)
			continue
		}
		if w, a := mode.Omega, mode.Separation; !(imag(w) < 0 && imag(w) > -2 && real(w) > 0 && real(w) < 2.5) ||
			!(cmplx.Abs(a-complex(float64(l*(l+1)-2), 0)) < 12) {
			t.Errorf("(%d,%d,%d) a=%g: ω = %g, A = %g", l, m, n, spin, w, a)
		}
	}
}
