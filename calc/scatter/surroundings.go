package scatter

// Surroundings are what stands around both ends, in SI units and radians, power ratios linear.
type Surroundings struct {
	Sight bool    // whether the direct path is there
	K     float64 // direct over scattered power; not read without sight, nor beside reflectors
	XPR   float64 // cross-polar ratio X of the scatter

	// Near and Far are the spectra seen by the two ends. They are not read where Reflectors stand.
	Near, Far Angular

	// Reflectors, where not empty, replace the spectra, K and XPR.
	Reflectors []Reflector
}

// Form names the shape of an angular density.
type Form int

const (
	// Laplacian: exp(−√2 |x|/σ).
	Laplacian Form = iota
	// Gaussian: exp(−x²/2σ²).
	Gaussian
	// VonMises: exp(κ cos x), κ = 1/σ².
	VonMises
	// Uniform: the same at every angle; σ is not read.
	Uniform
	// Cosine: ½ cos x, in elevation only. With a uniform azimuth it fills the sphere evenly, 1/4π; σ is not read.
	Cosine
)

// Angular is a spectrum over azimuth and elevation before any antenna pattern,
//
//	p(Ω) dΩ = p_az(φ) p_el(θ) dφ dθ
//
// without a further cos θ: the azimuth density is cut at ±180° about its mean, the elevation density at ±90°. Each σ
// belongs to the density before it is cut; 0 is a single direction. Means are in the frame of the end that looks.
type Angular struct {
	AzimuthForm, ElevationForm Form
	AzimuthSpread              float64 // σ, rad
	ElevationSpread            float64 // σ, rad
	AzimuthMean                float64 // rad, clockwise off forward
	ElevationMean              float64 // rad, up
}

// Reflector is one surveyed thing that reflects, in the near mount's frame.
type Reflector struct {
	Right, Up, Forward float64 // m
	Amplitude          float64 // of its path relative to the direct path in free space
}
