// Package sheet is the mount sheet: the whole description of one mount and its
// far end in one JSON document that a person can read, keep and hand on.
//
// The structs mirror the document, border units included. Read decodes strictly:
// what it returns can be computed with, and what it refuses it refuses with the
// path of the field and what to change. Frames and signs are those of package
// calc.
package sheet

import "crossplumb/calc/codec"

// Sheet is one mount, its far end, the path between and what is asked of them.
type Sheet struct {
	Title        string
	Radio        Radio
	Near, Far    Mount
	Path         Path
	Surroundings Surroundings
	Landmarks    []Landmark   // known points in sight of the near mount
	RadioFigures *codec.Value // read by calc/fault; nil where there are none
	Limits       []Limit
}

// Radio is the radio that the antennas serve.
type Radio struct {
	FrequencyMHz  float64
	BandwidthMHz  *float64
	Combining     bool      // true: combines its chains; false: ties each port to one far port
	Power         string    // "per-chain" or "shared"
	TxPowerDBm    []float64 // per chain; nil where not stated
	NoiseFigureDB *float64
	SNRDB         *float64 // per chain, as measured; nil: from transmit power, gains and path
	Links         []Link   // nil: ports pair by largest coupling
}

// The two meanings of a radio's power.
const (
	PerChain = "per-chain" // each chain has the stated power of its own
	Shared   = "shared"    // the chains share one power
)

// WavelengthM is the wavelength in metres.
func (r *Radio) WavelengthM() float64 { return SpeedOfLight / (r.FrequencyMHz * 1e6) }

// SpeedOfLight in m/s, exact by the definition of the metre (BIPM, SI Brochure,
// 9th edition). Air is taken as vacuum: its index, 1.0003, is 0.03 %.
const SpeedOfLight = 299792458.0

// Link ties one near port to one far port.
type Link struct{ Near, Far string }

// Mount is the antennas of one end. The first antenna is the datum: its position
// is taken as exact, the others are measured from it.
type Mount struct{ Antennas []Antenna }

// Antenna is one body with its ports.
type Antenna struct {
	ID                string
	Pattern           Pattern
	SizeMM            *Size // for the drawing
	ElectricalTiltDeg float64
	LevelDatum        *LevelDatum
	Elements          []Element
	Position          PositionStates // of the antenna's centre, mount frame
	Azimuth           AngleStates    // not set for rotationally symmetric antennas
	Tilt, Skew        AngleStates
}

// Symmetric tells whether the antenna has no azimuth of its own: isotropic,
// omni and dipole.
func (a *Antenna) Symmetric() bool { return a.Pattern.Symmetric() }

// Size is the outline of an antenna.
type Size struct{ WidthMM, HeightMM float64 }

// LevelDatum is where a level or phone lies on the antenna, and what it reads
// there when the antenna is true.
type LevelDatum struct {
	Surface                      string
	SkewOffsetDeg, TiltOffsetDeg float64
}

// The kinds of pattern.
const (
	Isotropic   = "isotropic"
	Panel       = "panel"
	Omni        = "omni"
	Dipole      = "dipole"
	Dish        = "dish"
	SampledCuts = "cuts"
)

// Pattern is the radiation pattern of an antenna; nil where the kind has no such
// figure or the sheet does not state it.
type Pattern struct {
	Kind           string
	GainDBi        *float64
	BeamwidthAzDeg *float64
	BeamwidthElDeg *float64
	FrontToBackDB  *float64
	SidelobeDB     *float64 // level of the highest side lobe below the main lobe, positive
	DiameterM      *float64
	Cuts           *Cuts
}

// Symmetric tells whether the pattern is the same in every azimuth.
func (p *Pattern) Symmetric() bool {
	return p.Kind == Isotropic || p.Kind == Omni || p.Kind == Dipole
}

// Cuts are the two principal cuts of a sampled pattern, relative to the peak.
type Cuts struct{ Azimuth, Elevation Cut }

// Cut is one cut: angles off boresight in rising order, −180…180 (azimuth,
// clockwise positive) or −90…90 (elevation, up positive), and levels in dB.
type Cut struct{ AnglesDeg, LevelsDB []float64 }

// Element is one port of an antenna.
type Element struct {
	Port         string
	SlantDeg     float64
	OffsetMM     Vector   // from the antenna's centre, turning with the body
	XPDDB        *float64 // cross-polar discrimination; nil: perfect
	AxialRatioDB *float64 // nil: linear
	Hand         string   // "right", "left" or empty for linear
}

// Vector is a place in a mount frame, in the unit its field names.
type Vector struct{ Right, Up, Forward float64 }

// AngleStates are the readings of one angle of one antenna.
type AngleStates struct {
	Planned Angle
	AsFound []Angle
	AsLeft  []Angle
	Turned  bool // as_left stands there empty: the bolt moved and nothing was read since
}

// At returns the readings of a state; the plan is a list of one.
func (s *AngleStates) At(state State) []Angle {
	switch state {
	case AsFound:
		return s.AsFound
	case AsLeft:
		return s.AsLeft
	}
	return []Angle{s.Planned}
}

// PositionStates are the readings of the position of one antenna.
type PositionStates struct {
	Planned Position
	AsFound []Position
	AsLeft  []Position
	Turned  bool // as_left stands there empty: the bolt moved and nothing was read since
}

// At returns the readings of a state; the plan is a list of one.
func (s *PositionStates) At(state State) []Position {
	switch state {
	case AsFound:
		return s.AsFound
	case AsLeft:
		return s.AsLeft
	}
	return []Position{s.Planned}
}

// State is one of the three states of a mount.
type State int

// The states, in their order in time.
const (
	Planned State = iota
	AsFound
	AsLeft
)

// String is the state's name in documents.
func (s State) String() string {
	switch s {
	case AsFound:
		return "as_found"
	case AsLeft:
		return "as_left"
	}
	return "planned"
}

// How tells how a reading was made.
type How struct {
	Method     string
	Instrument string
	At         string // RFC 3339
	By         string
}

// Angle is one reading of an angle with its standard uncertainty.
type Angle struct {
	Deg, UDeg float64
	How
}

// Position is one reading of a position with the standard uncertainty of each
// axis; an axis that was not measured is nil.
type Position struct {
	Right, Up, Forward *float64 // mm
	UMM                float64
	How
}

// Path is the way to the far end, from the near datum to the far datum.
type Path struct {
	BearingDeg   float64 // true
	ElevationDeg float64
	DistanceM    float64

	// What calc/aim works out bearing, profile and expected level from; nil or empty
	// where nobody surveyed it.
	NearAt, FarAt *Place
	HeightDatum   string // what every height of the sheet is above
	KFactor       *float64
	AboveGroundM  *float64 // the near antennas above the ground that their beams cover
	Obstacles     []Obstacle
}

// Surroundings hold exactly one of Class, Spreads and Reflectors.
type Surroundings struct {
	Sight      bool
	Class      *Class
	Spreads    *Spreads
	Reflectors []Reflector
}

// Class is a scenario of a published channel model.
type Class struct {
	Standard, Edition, Scenario string
	MastEnd                     string // "near" or "far": which end is the mast (base station)
}

// The one edition whose tables calc/scatter holds.
const (
	ClassStandard = "3GPP TR 38.901"
	ClassEdition  = "V16.1.0"
)

// Spreads are typed surroundings.
type Spreads struct {
	Near, Far Spread
	KDB       *float64 // Ricean factor; nil: no sight
	XPRDB     float64  // cross-polar ratio of the scattered field
	Spectrum  string   // "laplacian", "gaussian" or "vonmises"
}

// Spread is the σ of the untruncated angular density at one end.
type Spread struct{ AzimuthDeg, ElevationDeg float64 }

// Reflector is one surveyed thing that reflects.
type Reflector struct {
	Name        string
	BearingDeg  float64 // true, from the near datum
	DistanceM   float64 // horizontal, from the near datum
	HeightM     float64 // above the near datum
	AmplitudeDB float64 // relative to the direct path
}

// Limit is one thing asked of the mount.
type Limit struct {
	Name    string
	AtLeast bool // otherwise at most
	Value   float64
	Reason  string
	Field   string // path of the limit in the sheet
}
