package event

import (
	"errors"
	"reflect"
	"slices"
	"strings"
	"testing"

	"knell/configs"
)

// tiny is a sound event file that is quick to load: one site without noise, one
// second at a low rate.
const tiny = `title = "Tiny"
seed  = 7

[event]
time         = 1400000123.250   # GPS s
sky          = { right_ascension = 1.95, declination = 0.62 }
polarization = 0.7
inclination  = 0.5

[[site]]
code      = "H1"
synthetic = { curve = "second-generation-broadband", seed = 4, length = 8.0, quiet = true }
noise     = { from = "curve" }

[injection]
model  = "ringdown"
modes  = ["2,2,0"]
values = { mass = 68.0, spin = 0.69, amplitude_220 = 4e-21, phase_220 = 1.3 }

[analysis]
sample_rate = 1024.0
duration    = 1.0
band        = [40.0, 460.0]
start       = 0.0
gate        = 0.125

[sampler]
live_points    = 100
evidence_error = 1.0
max_calls      = 0

[[hypothesis]]
name  = "horizon"
model = "ringdown"
modes = ["2,2,0"]

[[hypothesis]]   # second
name  = "surface"
model = "cavity"
modes = ["2,2,0"]
reflectivity = "constant"

[prior]
mass         = { kind = "uniform", low = 40.0, high = 110.0 }
spin         = { kind = "uniform", low = 0.0,  high = 0.98 }
amplitude    = { kind = "uniform", low = 0.0,  high = 5e-21 }
reflectivity = { kind = "uniform", low = 0.0,  high = 1.0 }
offset       = { kind = "uniform", low = -1.0, high = 12.0 }
`

// edit replaces the one place of old in tiny.
func edit(t *testing.T, old, new string) string {
	t.Helper()
	if strings.Count(tiny, old) != 1 {
		t.Fatalf("%q stands %d times in the event file, want once", old, strings.Count(tiny, old))
	}
	return strings.Replace(tiny, old, new, 1)
}

// lineOf is the number of the one line that contains mark.
func lineOf(t *testing.T, text, mark string) int {
	t.Helper()
	if mark == "" {
		return 0
	}
	if strings.Count(text, mark) != 1 {
		t.Fatalf("mark %q stands %d times, want once", mark, strings.Count(text, mark))
	}
	return 1 + strings.Count(text[:strings.Index(text, mark)], "\n")
}

func TestDecodeSound(t *testing.T) {
	c, err := Decode("folder/tiny.toml", []byte(tiny))
	if err != nil {
		t.Fatal(err)
	}
	if c.Title != "Tiny" || c.Seed != 7 || c.Folder != "folder" || c.Event.Time != 1400000123.25 || c.Event.Declination != 0.62 {
		t.Errorf("got %+v", c)
	}
	if len(c.Sites) != 1 || c.Sites[0].Synthetic == nil || c.Sites[0].Noise.Curve != "second-generation-broadband" {
		t.Errorf("got sites %+v, want the noise curve to be that of the synthetic strain", c.Sites)
	}
	if want := (Analysis{1024, 1, 40, 460, 0, 0.125}); c.Analysis != want {
		t.Errorf("got analysis %+v, want %+v", c.Analysis, want)
	}
	if want := (Sampler{100, 1, 0, DefaultRemaining, 0}); c.Sampler != want {
		t.Errorf("got sampler %+v, want %+v", c.Sampler, want)
	}
	// Parameters of the models: a periodic one and one with a default need no prior.
	want := []string{"amplitude_220", "echo_phase", "mass", "offset", "phase_220", "reflectivity", "spin", "start_time"}
	if got := sortedKeys(c.Hypotheses[1].Priors); !slices.Equal(got, want) {
		t.Errorf("got priors of %v, want %v", got, want)
	}
}

// TestDecodeDefaults reads a file without the keys that may be left out.
func TestDecodeDefaults(t *testing.T) {
	text := tiny
	for _, line := range []string{"title = \"Tiny\"\n", "seed  = 7\n", "polarization = 0.7\n", "inclination  = 0.5\n", "start       = 0.0\n", "gate        = 0.125\n"} {
		text = strings.Replace(text, line, "", 1)
	}
	from, to := strings.Index(text, "[sampler]"), strings.Index(text, "[[hypothesis]]")
	c, err := Decode("some/bells.toml", []byte(text[:from]+text[to:]))
	if err != nil {
		t.Fatal(err)
	}
	if c.Title != "bells" || c.Seed != 1 || c.Analysis.Gate != DefaultGate || c.Analysis.Start != 0 {
		t.Errorf("got title %q, seed %d, gate %g, start %g", c.Title, c.Seed, c.Analysis.Gate, c.Analysis.Start)
	}
	if want := (Sampler{DefaultLivePoints, DefaultEvidenceError, 0, DefaultRemaining, 0}); c.Sampler != want {
		t.Errorf("got sampler %+v, want %+v", c.Sampler, want)
	}
}

// Durations that are whole numbers of samples but not in binary.
func TestDecodeDuration(t *testing.T) {
	c, err := Decode("x.toml", []byte(strings.NewReplacer("sample_rate = 1024.0", "sample_rate = 1000.0", "duration    = 1.0", "duration = 1.1").Replace(tiny)))
	if err != nil {
		t.Fatal(err)
	}
	if n := c.Analysis.samples(); n != 1100 {
		t.Errorf("got %d samples, want 1100", n)
	}
}

func TestDecodeErrors(t *testing.T) {
	horizon := "[[hypothesis]]\nname  = \"horizon\"\nmodel = \"ringdown\"\nmodes = [\"2,2,0\"]\n"
	surface := "model = \"cavity\"\nmodes = [\"2,2,0\"]\nreflectivity = \"constant\"\n"
	for _, tc := range []struct {
		why      string
		old, new string
		at       string // a text that only the line to be named has; "" for no line
		key      string
		got      string // what the error must say was found
		want     string // what it must say would be accepted
	}{
		// Unknown keys at each level.
		{"unknown key", "seed  = 7", "sede = 7", "sede", "sede", "7", "one of analysis, event, hypothesis, injection, prior, sampler, seed, site, title"},
		{"unknown table", "[sampler]", "[sampling]", "[sampling]", "sampling", "a table", "sampler"},
		{"in event", "polarization = 0.7", "polarisation = 0.7", "polarisation", "event.polarisation", "0.7", "polarization"},
		{"in sky", "right_ascension = 1.95", "right_ascension = 1.95, distance = 3", "distance", "event.sky.distance", "3", "right_ascension"},
		{"in site", `code      = "H1"`, "code = \"H1\"\ncolour = \"red\"", "colour", "site[0].colour", `"red"`, "one of code, noise, synthetic"},
		{"in synthetic", "seed = 4", "sed = 4", "sed = 4", "site[0].synthetic.sed", "4", "curve, length, quiet, seed"},
		{"in noise", `{ from = "curve" }`, `{ from = "curve", fudge = 2 }`, "fudge", "site[0].noise.fudge", "2", "smooth"},
		{"key of another kind of noise", `{ from = "curve" }`, `{ from = "curve", average = "mean" }`, "mean", "site[0].noise.average", `"mean"`, "curve, from, smooth"},
		{"in analysis", "duration    = 1.0", "duration = 1.0\nlength = 1.0", "length = 1.0", "analysis.length", "1", "duration"},
		{"in sampler", "evidence_error = 1.0", "evidenceerror = 1.0", "evidenceerror", "sampler.evidenceerror", "1", "evidence_error"},
		{"in injection", "values = {", "shift = 1\nvalues = {", "shift", "injection.shift", "1", "values"},
		{"in injection values", "spin = 0.69", "spin = 0.69, charge = 0.1", "charge", "injection.values.charge", "0.1", "mass, spin"},
		{"in hypothesis", `name  = "surface"`, "name = \"surface\"\nsurface = 1", "surface = 1", "hypothesis[1].surface", "1", "reflectivity"},
		{"in a prior", "high = 110.0", "high = 110.0, step = 1", "step", "prior.mass.step", "1", "known key: uniform takes low, high"},
		{"in a hypothesis's prior", surface, surface + "prior = { charge = { kind = \"fixed\", value = 0.0 } }\n", "charge", "hypothesis[1].prior.charge", "a prior", "echo_phase"},
		{"prior for nobody", "offset       =", "charge = { kind = \"fixed\", value = 1.0 }\noffset =", "charge", "prior.charge", "a prior", "a parameter of one of the hypotheses"},

		{"misspelt key that must be there", "duration    = 1.0", "durration = 1.0", "durration", "analysis.durration", "1", "duration"},
		{"misspelt code", `code      = "H1"`, `cod = "H1"`, "cod = ", "site[0].cod", "H1", "code"},

		// Wrong types.
		{"title", `"Tiny"`, "5", "title", "title", "5", "a text"},
		{"seed a text", "seed  = 7", `seed = "7"`, "seed = \"7\"", "seed", `"7"`, "a whole number"},
		{"seed a fraction", "seed  = 7", `seed = 7.5`, "7.5", "seed", `7.5`, "a whole number"},
		{"time a text", "1400000123.250", `"noon"`, "noon", "event.time", `"noon"`, "GPS"},
		{"time a date", "1400000123.250", `2024-05-18T10:15:00Z`, "2024-05", "event.time", "2024-05-18T10:15:00Z", "GPS"},
		{"time not a number", "1400000123.250", `nan`, "= nan", "event.time", `nan`, "GPS"},
		{"sky a list", "{ right_ascension = 1.95, declination = 0.62 }", "[1.95, 0.62]", "sky", "event.sky", "[1.95, 0.62]", "right_ascension = rad"},
		{"event under another name", "[event]\n", "[happening]\n", "[happening]", "happening", "a table", "analysis, event"},
		{"site a table", "[[site]]", "[site]", "[site]", "site", "a table", "[[site]]"},
		{"quiet a text", "quiet = true", `quiet = "yes"`, `"yes"`, "site[0].synthetic.quiet", `"yes"`, "true or false"},
		{"band a number", "[40.0, 460.0]", "40.0", "band  ", "analysis.band", "40", "[low, high]"},
		{"band of texts", "[40.0, 460.0]", `["a", 460.0]`, "band  ", "analysis.band", `["a", 460]`, "[low, high]"},
		{"band of three", "[40.0, 460.0]", `[40, 100, 200]`, "band  ", "analysis.band", `[40, 100, 200]`, "[low, high]"},
		{"modes a text", horizon, strings.Replace(horizon, `["2,2,0"]`, `"2,2,0"`, 1), `modes = "2,2,0"`, "hypothesis[0].modes", `"2,2,0"`, "a list of modes"},
		{"modes of numbers", horizon, strings.Replace(horizon, `["2,2,0"]`, `[220]`, 1), "[220]", "hypothesis[0].modes", "[220]", "a list of modes"},
		{"prior a number", `{ kind = "uniform", low = 40.0, high = 110.0 }`, "68.0", "mass         =", "prior.mass", "68", `{ kind = "uniform"`},
		{"prior's end a text", "low = 40.0", `low = "forty"`, "forty", "prior.mass.low", `"forty"`, "a number"},
		{"value a text", "mass = 68.0", `mass = "heavy"`, "heavy", "injection.values.mass", `"heavy"`, "a number"},

		// Missing keys.
		{"no time", "time         = 1400000123.250   # GPS s\n", "", "[event]", "event.time", "nothing", "GPS"},
		{"no declination", ", declination = 0.62", "", "sky", "event.sky.declination", "nothing", "-pi/2 to pi/2"},
		{"no code", "code      = \"H1\"\n", "", "[[site]]", "site[0].code", "nothing", "two characters"},
		{"no strain", `synthetic = { curve = "second-generation-broadband", seed = 4, length = 8.0, quiet = true }`, "", "[[site]]", "site[0].strain", "nothing", "synthetic"},
		{"no band", "band        = [40.0, 460.0]\n", "", "[analysis]", "analysis.band", "nothing", "[low, high]"},
		{"no sample rate", "sample_rate = 1024.0\n", "", "[analysis]", "analysis.sample_rate", "nothing", "Hz"},
		{"no model", "model = \"cavity\"\n", "", "# second", "hypothesis[1].model", "nothing", `"ringdown", "cavity"`},
		{"no kind", `kind = "uniform", low = 40.0`, "low = 40.0", "low = 40.0", "prior.mass.kind", "nothing", "uniform"},
		{"no low", "low = 40.0, ", "", "mass         =", "prior.mass.low", "nothing", "low, high"},
		{"no prior for mass", "mass         =", "# mass =", "[prior]", "prior.mass", "nothing", `hypothesis "horizon"`},
		{"no value", "mass = 68.0, ", "", "values", "injection.values.mass", "nothing", "remnant mass"},
		{"no reflectivity", "reflectivity = \"constant\"\n", "", "# second", "hypothesis[1].reflectivity", "nothing", "constant, boltzmann"},
		{"noise curve of strain from a file", `synthetic = { curve = "second-generation-broadband", seed = 4, length = 8.0, quiet = true }`, `strain = "h1.hdf5"`, "noise ", "site[0].noise.curve", "nothing", "second-generation-broadband"},

		// Bad values.
		{"negative seed", "seed  = 7", "seed  = -7", "-7", "seed", "-7", "0 or more"},
		{"negative noise seed", "seed = 4", "seed = -4", "-4", "site[0].synthetic.seed", "-4", "0 or more"},
		{"time before any strain", "1400000123.250", "-3", "= -3", "event.time", "-3", "GPS"},
		{"time past any strain", "1400000123.250", "1e300", "1e300", "event.time", "1e+300", "GPS"},
		{"time at no site", "polarization = 0.7", "time_at = \"L1\"", "time_at", "event.time_at", `"L1"`, "the code of a [[site]]"},
		{"declination", "declination = 0.62", "declination = 1.58", "1.58", "event.sky.declination", "1.58", "-pi/2 to pi/2"},
		{"inclination", "inclination  = 0.5", "inclination  = 3.2", "= 3.2", "event.inclination", "3.2", "0 to pi"},
		{"code in lower case", `"H1"`, `"h1"`, `"h1"`, "site[0].code", `"h1"`, "two characters"},
		{"unknown site", `"H1"`, `"Q7"`, `"Q7"`, "site[0].code", `"Q7"`, "geometry"},
		{"site twice", "[injection]", "[[site]]\ncode = \"H1\" # again\nstrain = \"x.hdf5\"\n[injection]", "# again", "site[1].code", `"H1"`, "each site once"},
		{"two sources", "noise     =", "strain = \"x.hdf5\"\nnoise =", "x.hdf5", "site[0].strain", "x.hdf5", "not both"},
		{"unknown curve", "second-generation-broadband", "pink", "pink", "site[0].synthetic.curve", `"pink"`, "second-generation-broadband"},
		{"unknown source of noise", `from = "curve"`, `from = "ear"`, `"ear"`, "site[0].noise.from", `"ear"`, `"data", "curve", "file"`},
		{"unknown average", `from = "curve"`, `average = "mode"`, `"mode"`, "site[0].noise.average", `"mode"`, `"median", "mean"`},
		{"band above Nyquist", "460.0]", "512.0]", "band  ", "analysis.band", "[40, 512]", "below the Nyquist frequency of 512 Hz"},
		{"band reversed", "[40.0, 460.0]", "[460.0, 40.0]", "band  ", "analysis.band", "[460, 40]", "low < high"},
		{"band from zero", "[40.0,", "[0.0,", "band  ", "analysis.band", "[0, 460]", "0 < low"},
		{"band below two cycles", "[40.0,", "[1.5,", "band  ", "analysis.band", "[1.5, 460]", "at least 2 Hz"},
		{"band between two frequencies", "[40.0, 460.0]", "[40.2, 40.8]", "band  ", "analysis.band", "[40.2, 40.8]", "one multiple of 1 Hz"},
		{"odd number of samples", "duration    = 1.0", "duration = 1.0009765625", "1.0009765625", "analysis.duration", "1.0009765625", "even number of samples"},
		{"fraction of a sample", "duration    = 1.0", "duration = 1.0003", "1.0003", "analysis.duration", "1.0003", "even number of samples"},
		{"too many samples", "duration    = 1.0", "duration = 1e6", "1e6", "analysis.duration", "1e+06", "at most 16777216 samples"},
		{"no duration", "duration    = 1.0", "duration = 0.0", "duration", "analysis.duration", "0", "above zero"},
		{"rate without bound", "sample_rate = 1024.0", "sample_rate = inf", "inf", "analysis.sample_rate", "inf", "Hz"},
		{"gate too long", "gate        = 0.125", "gate = 0.5", "gate", "analysis.gate", "0.5", "less than half"},
		{"gate below a sample", "gate        = 0.125", "gate = 1e-4", "gate", "analysis.gate", "0.0001", "at least one sample"},
		{"gate of too many samples", "sample_rate = 1024.0", "sample_rate = 131072.0", "gate", "analysis.gate", "0.125", "at most 8192 samples"},
		{"negative gate", "gate        = 0.125", "gate = -0.125", "gate", "analysis.gate", "-0.125", "0 or more"},
		{"few live points", "live_points    = 100", "live_points = 99", "live_points", "sampler.live_points", "99", "100 to 1000000"},
		{"small error", "evidence_error = 1.0", "evidence_error = 0.001", "evidence_error", "sampler.evidence_error", "0.001", "0.01 or more"},
		{"few calls", "max_calls      = 0", "max_calls = 99", "max_calls", "sampler.max_calls", "99", "at least live_points"},
		{"unknown model", `"cavity"`, `"sphere"`, `"sphere"`, "hypothesis[1].model", `"sphere"`, `"ringdown", "cavity"`},
		{"unknown reflectivity", `reflectivity = "constant"`, `reflectivity = "mirror"`, "mirror", "hypothesis[1].reflectivity", `"mirror"`, "constant, boltzmann"},
		{"reflectivity of a horizon", horizon, horizon + "reflectivity = \"constant\" # here\n", "# here", "hypothesis[0].reflectivity", `"constant"`, "no such key"},
		{"unknown parity", surface, surface + "parity = \"both\"\n", "both", "hypothesis[1].parity", `"both"`, `"odd" or "even"`},
		{"mode of two numbers", horizon, strings.Replace(horizon, "2,2,0", "2,2", 1), `["2,2"]`, "hypothesis[0].modes", `"2,2"`, `"l,m,n"`},
		{"mode of words", horizon, strings.Replace(horizon, "2,2,0", "two,2,0", 1), "two", "hypothesis[0].modes", `"two,2,0"`, `"l,m,n"`},
		{"mode that is not", horizon, strings.Replace(horizon, "2,2,0", "2,3,0", 1), "2,3,0", "hypothesis[0].modes", `"2,3,0"`, "-2 to 2"},
		{"mode twice", horizon, strings.Replace(horizon, `"2,2,0"`, `"2,2,0", "2,2,0"`, 1), `"2,2,0", "2,2,0"`, "hypothesis[0].modes", "twice", "each mode once"},
		{"no mode", horizon, strings.Replace(horizon, `"2,2,0"`, "", 1), "[]", "hypothesis[0].modes", "[]", "a list of modes"},
		{"mode beyond the table", surface, strings.Replace(surface, "2,2,0", "5,2,0", 1), "5,2,0", "hypothesis[1].modes", `"5,2,0"`, "2 to 4"},
		{"misspelt prior", "mass         = {", "mas = {", "mas = {", "prior.mas", "a prior", "did you mean mass"},
		{"misspelt prior of a kind", "amplitude    = {", "amplitide = {", "amplitide", "prior.amplitide", "a prior", "did you mean amplitude_220"},
		{"misspelt value of an injection", "{ mass = 68.0", "{ mas = 68.0", "values", "injection.values.mas", "68", "mass, spin"},
		{"unknown excitation", surface, surface + "excitation = \"kick\"\n", "kick", "hypothesis[1].excitation", `"kick"`, `"source"`},
		{"excitation of a horizon", horizon, horizon + "excitation = \"source\" # here\n", "# here", "hypothesis[0].excitation", `"source"`, "no such key"},
		{"unknown angular factors", horizon, horizon + "angular = \"flat\"\n", "flat", "hypothesis[0].angular", `"flat"`, `"spherical"`},
		{"count of a cavity", surface, surface + "count = 3 # here\n", "# here", "hypothesis[1].count", "3", "no such key"},
		{"count below one", surface, surface + "count = 0 # here\n", "# here", "hypothesis[1].count", "0", "above zero"},
		{"packets without a prior", horizon, strings.NewReplacer("ringdown", "burst", "modes = [\"2,2,0\"]", "count = 2").Replace(horizon), "[prior]", "prior.time_1", "nothing", "for all of its kind, time"},
		{"hypothesis twice", `"surface"`, `"horizon" # again`, "again", "hypothesis[1].name", `"horizon"`, "its own name"},
		{"hypothesis twice but for capitals", `"surface"`, `"Horizon"`, `"Horizon"`, "hypothesis[1].name", `"Horizon"`, "capitals"},
		{"name that is no file's", `"surface"`, `"../surface"`, "../", "hypothesis[1].name", `"../surface"`, "letters"},
		{"low above high", "low = 40.0", "low = 140.0", "140.0", "prior.mass.low", "140", "less than high = 110"},
		{"unknown kind", `kind = "uniform", low = 40.0`, `kind = "flat", low = 40.0`, "flat", "prior.mass.kind", `"flat"`, "uniform"},
		{"spin beyond the model", "high = 0.98", "high = 1.2", "high = 1.2", "prior.spin", "uniform on [0, 1.2]", "0 to 0.998"},
		{"start before the segment", "[prior]", "[prior]\nstart_time = { kind = \"fixed\", value = -0.5 }", "start_time", "prior.start_time", "-0.5", "segment"},
		{"mass below zero", "low = 40.0", "low = -40.0", "-40.0", "prior.mass", "uniform on [-40, 110]", "mass of the model ringdown"},
		{"injected spin beyond the model", "spin = 0.69", "spin = 1.69", "1.69", "injection.values.spin", "1.69", "0 to 0.998"},
		{"injected model", "[injection]\nmodel  = \"ringdown\"", "[injection]\nmodel = \"ring\"", `"ring"`, "injection.model", `"ring"`, "ringdown"},

		// Not TOML.
		{"open string", `title = "Tiny"`, `title = "Tiny`, "title", "near the key title", "", "TOML 1.0"},
		{"word for a value", `title = "Tiny"`, `title = Tiny`, "title", "near the key title", "", "TOML 1.0"},
		{"key twice", "seed  = 7", "seed = 7\nseed = 8", "seed = 8", "near the key seed", "already been defined", "TOML 1.0"},
		{"open bracket", "[event]", "[event", "time  ", "", "to end table name", "TOML 1.0"},
	} {
		t.Run(tc.why, func(t *testing.T) {
			text := edit(t, tc.old, tc.new)
			_, err := Decode("x/bad.toml", []byte(text))
			var e *InputError
			if !errors.As(err, &e) {
				t.Fatalf("got error %v, want an InputError", err)
			}
			if line := lineOf(t, text, tc.at); e.File != "x/bad.toml" || e.Line != line {
				t.Errorf("got %s:%d, want x/bad.toml:%d\n%v", e.File, e.Line, line, e)
			}
			message := e.Error()
			if e.Key != tc.key && !(strings.HasPrefix(tc.key, "near") && strings.HasPrefix(e.Key, tc.key)) {
				t.Errorf("got key %q, want %q", e.Key, tc.key)
			}
			if !strings.Contains(message, tc.got) || !strings.Contains(e.Want, tc.want) {
				t.Errorf("got %q, want %q found and %q wanted", message, tc.got, tc.want)
			}
			readable(t, message)
		})
	}
}

// readable refuses messages that show the program's insides or are not one line.
func readable(t *testing.T, message string) {
	t.Helper()
	for _, bad := range []string{"\n", "%!", "strconv", "<nil>", "0x", "map[", "interface", "float64", "int64", "goroutine", "open /", "models:", "priors:", "strain: strain"} {
		if strings.Contains(message, bad) {
			t.Errorf("message %q has %q in it", message, bad)
		}
	}
}

// FuzzDecode looks for panics, for errors that are no InputError, and for files
// whose AsRun is not the same event.
func FuzzDecode(f *testing.F) {
	f.Add(tiny)
	for _, name := range configs.DemoNames() {
		_, text, err := configs.Demo(name)
		if err != nil {
			f.Fatal(err)
		}
		f.Add(string(text))
	}
	f.Add("site = [{code = \"H1\", strain = 'a'}]\nevent.time = 4\n\"a=b\".'c.d' = \"\"\"x\n]\"\"\"\n")
	f.Fuzz(func(t *testing.T, text string) {
		c, err := Decode("fuzz.toml", []byte(text))
		if err != nil {
			var e *InputError
			if !errors.As(err, &e) || e.File != "fuzz.toml" || e.Line < 0 || e.Line > 1+strings.Count(text, "\n") {
				t.Fatalf("got error %#v", err)
			}
			return
		}
		c.SetSeed(c.Seed)
		again, err := Decode("fuzz.toml", c.AsRun())
		if err != nil {
			t.Fatalf("the event as run is refused: %v\n%s", err, c.AsRun())
		}
		sameEvent(t, again, c)
	})
}

// sameEvent compares all but the text.
func sameEvent(t *testing.T, got, want *Config) {
	t.Helper()
	a, b := *got, *want
	for _, c := range []*Config{&a, &b} {
		c.Source, c.lines, c.header, c.inserted = nil, nil, nil, nil
	}
	if !reflect.DeepEqual(a, b) {
		t.Errorf("got %+v\nwant %+v", a, b)
	}
}
