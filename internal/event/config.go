package event

import "knell/priors"

// Config is one event file, checked and in SI units (masses in solar masses).
type Config struct {
	File   string // where it was read, for messages
	Folder string // relative paths in it start here
	Source []byte // as read
	lines  lineIndex
	// Lines that the command line adds to Source: at its top, and below the
	// line of that number.
	header   []string
	inserted map[int][]string

	Title string
	Seed  uint64

	Event      Event
	Sites      []Site
	Injection  *Injection
	Analysis   Analysis
	Sampler    Sampler
	Hypotheses []Hypothesis
}

// Event says when and where the merger was seen.
type Event struct {
	Time float64 // GPS s
	// TimeAt is the site at which Time was measured; "" is the geocentre.
	TimeAt         string
	RightAscension float64 // rad, ICRS
	Declination    float64 // rad
	Polarization   float64 // rad
	Inclination    float64 // rad
}

// Site is one site's entry.
type Site struct {
	Code      string
	Geometry  *Geometry // nil: from the catalogue
	Strain    string    // a file, or
	Synthetic *Synthetic
	Noise     Noise
}

// Geometry is a site that the catalogue does not hold; angles in rad.
type Geometry struct {
	Latitude, Longitude, Height float64
	XAzimuth, YAzimuth          float64 // clockwise from north
	XTilt, YTilt                float64
}

// Synthetic is Gaussian noise made on the spot.
type Synthetic struct {
	Curve  string
	Seed   uint64
	Length float64 // s, centred on the event
	Quiet  bool    // no noise at all, only the injection: for checks
}

// Noise says where the noise's spectral density comes from.
type Noise struct {
	From    string  // data, curve or file
	Curve   string  // from = "curve"
	File    string  // from = "file": frequency and density
	Average string  // from = "data": median or mean
	Segment float64 // s, from = "data"
	Smooth  float64 // s: lag beyond which the autocovariance is tapered to zero; 0 is off
}

// Injection is a known signal added to the strain of every site.
type Injection struct {
	Signal
	Values map[string]float64
}

// Analysis says what part of the strain is compared.
type Analysis struct {
	SampleRate float64 // Hz
	Duration   float64 // s, gate included
	Low, High  float64 // Hz
	Start      float64 // s after the event time
	Gate       float64 // s before Start
}

// Sampler holds the sampler's settings.
type Sampler struct {
	LivePoints       int
	EvidenceError    float64 // nat
	PosteriorSamples float64 // effective number, 0 for any
	Remaining        float64 // nat
	MaxCalls         int64
}

// Hypothesis is a named model with its priors.
type Hypothesis struct {
	Name string
	Signal
	// Stable excludes parameters at which the cavity is unstable.
	Stable bool
	Priors map[string]NamedPrior
}

// Signal is a model and its settings, as models.Settings has them.
type Signal struct {
	Model                string
	Modes                []string
	Reflectivity, Parity string
	Excitation, Angular  string
	Count                int
}

// NamedPrior is a prior with the key it was read from.
type NamedPrior struct {
	Prior priors.Prior
	Key   string
}
