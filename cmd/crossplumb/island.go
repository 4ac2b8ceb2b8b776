package main

import (
	"encoding/json/jsontext"
	json "encoding/json/v2"

	"crossplumb/db"
)

// Everything in this file is invented: the company, the island (its coordinates are open ocean), people and sites.
const (
	demoCompany = "Marrow & Verrill Mast Works"
	demoIsland  = "Brandrey"
	northCrew   = "North crew"
	southCrew   = "South crew"
)

type demoPerson struct{ name, role, crew, passphrase string }

// The passphrases are printed at each start; a folder with them in it is marked and never served for real.
var demoPeople = []demoPerson{
	{"Ilse Marrow", db.Supervisor, "", "seven gulls on a ridge"},
	{"Tam Verrill", db.Climber, northCrew, "rope and rain and rivets"},
	{"Bea Quillan", db.Climber, northCrew, "the kettle is on below"},
	{"Odd Hessel", db.Climber, southCrew, "a lantern for the knoll"},
}

// What a sheet is made of, as it is written (DOOR: the mount sheet).
type (
	sheet struct {
		Sheet        int          `json:"sheet"`
		Title        string       `json:"title"`
		Radio        radio        `json:"radio"`
		Near         end          `json:"near"`
		Far          end          `json:"far"`
		Path         path         `json:"path"`
		Surroundings surroundings `json:"surroundings"`
		Landmarks    []landmarkAt `json:"landmarks,omitempty"`
		RadioFigures *struct{}    `json:"radio_figures"`
		Limits       []limit      `json:"limits"`
	}
	radio struct {
		FrequencyMHz  float64   `json:"frequency_mhz"`
		BandwidthMHz  float64   `json:"bandwidth_mhz"`
		Combining     bool      `json:"combining"`
		Power         string    `json:"power"`
		TxPowerDBm    []float64 `json:"tx_power_dbm"`
		NoiseFigureDB float64   `json:"noise_figure_db"`
		SNRDB         *float64  `json:"snr_db"`
		Links         []link    `json:"links,omitempty"`
	}
	link struct {
		Near string `json:"near"`
		Far  string `json:"far"`
	}
	end struct {
		Antennas []antenna `json:"antennas"`
	}
	path struct {
		BearingDeg   float64 `json:"bearing_deg"`
		ElevationDeg float64 `json:"elevation_deg"`
		DistanceM    float64 `json:"distance_m"`

		NearAt      *place     `json:"near_at,omitempty"`
		FarAt       *place     `json:"far_at,omitempty"`
		HeightDatum string     `json:"height_datum,omitempty"`
		Obstacles   []obstacle `json:"obstacles,omitempty"`
	}
	surroundings struct {
		Sight   bool     `json:"sight"`
		Class   *class   `json:"class,omitempty"`
		Spreads *spreads `json:"spreads,omitempty"`
	}
	class struct {
		Standard string `json:"standard"`
		Edition  string `json:"edition"`
		Scenario string `json:"scenario"`
		MastEnd  string `json:"mast_end"`
	}
	spreads struct {
		Near     spread   `json:"near"`
		Far      spread   `json:"far"`
		KDB      *float64 `json:"k_db"`
		XPRDB    float64  `json:"xpr_db"`
		Spectrum string   `json:"spectrum"`
	}
	spread struct {
		AzimuthDeg   float64 `json:"azimuth_deg"`
		ElevationDeg float64 `json:"elevation_deg"`
	}
	limit struct {
		Name    string   `json:"name"`
		AtLeast *float64 `json:"at_least,omitempty"`
		AtMost  *float64 `json:"at_most,omitempty"`
		Reason  string   `json:"reason"`
	}
	antenna struct {
		ID             string    `json:"id"`
		Pattern        pattern   `json:"pattern"`
		SizeMM         size      `json:"size_mm"`
		ElectricalTilt float64   `json:"electrical_tilt_deg"`
		LevelDatum     *datum    `json:"level_datum"`
		Elements       []element `json:"elements"`
		PositionMM     states    `json:"position_mm"`
		Azimuth        *states   `json:"azimuth"`
		Tilt           states    `json:"tilt"`
		Skew           states    `json:"skew"`
	}
	pattern struct {
		Kind           string   `json:"kind"`
		GainDBi        float64  `json:"gain_dbi"`
		BeamwidthAzDeg *float64 `json:"beamwidth_az_deg,omitempty"`
		BeamwidthElDeg *float64 `json:"beamwidth_el_deg,omitempty"`
		FrontToBackDB  *float64 `json:"front_to_back_db,omitempty"`
		SidelobeDB     *float64 `json:"sidelobe_db,omitempty"`
	}
	size struct {
		Width  float64 `json:"width"`
		Height float64 `json:"height"`
	}
	datum struct {
		Surface       string  `json:"surface"`
		SkewOffsetDeg float64 `json:"skew_offset_deg"`
		TiltOffsetDeg float64 `json:"tilt_offset_deg"`
	}
	element struct {
		Port     string   `json:"port"`
		SlantDeg float64  `json:"slant_deg"`
		OffsetMM offsets  `json:"offset_mm"`
		XPDDB    *float64 `json:"xpd_db"`
	}
	offsets struct {
		Right   float64 `json:"right"`
		Up      float64 `json:"up"`
		Forward float64 `json:"forward"`
	}
	states struct {
		Planned reading   `json:"planned"`
		AsFound []reading `json:"as_found,omitempty"`
		AsLeft  []reading `json:"as_left,omitempty"`
	}
	reading struct {
		Value      any      `json:"value"`
		Unit       string   `json:"unit"`
		U          *float64 `json:"u,omitempty"`
		Method     string   `json:"method"`
		Instrument *string  `json:"instrument,omitempty"`
		At         *string  `json:"at,omitempty"`
		By         *string  `json:"by,omitempty"`
		North      *string  `json:"north,omitempty"`
	}
)

func (s sheet) text() jsontext.Value {
	text, err := json.Marshal(s)
	if err != nil {
		panic("demo: a sheet that cannot be written")
	}
	return text
}

func ptr[T any](v T) *T { return &v }

func plannedAngle(deg float64) states {
	return states{Planned: reading{Value: deg, Unit: "deg", Method: "plan"}}
}

func plannedBearing(deg float64) *states {
	return &states{Planned: reading{Value: deg, Unit: "deg", Method: "plan", North: ptr("true")}}
}

func plannedPlace(at offsets) states {
	return states{Planned: reading{Value: at, Unit: "mm", Method: "plan"}}
}

// measured puts what the other crew left at the far end into its states.
func (s states) measured(value, u float64, method string, north bool) states {
	r := reading{Value: value, Unit: "deg", U: &u, Method: method, Instrument: ptr("level 7")}
	if north {
		r.North = ptr("true")
	}
	s.AsLeft = []reading{r}
	return s
}

// crossedPanel is one panel with two crossed elements. slants are as seen from behind it.
func crossedPanel(id string, slants [2]float64, bearing, tilt float64) antenna {
	return antenna{
		ID: id,
		Pattern: pattern{Kind: "panel", GainDBi: 16, BeamwidthAzDeg: ptr(40.0), BeamwidthElDeg: ptr(16.0),
			FrontToBackDB: ptr(28.0), SidelobeDB: ptr(16.0)},
		SizeMM:     size{Width: 320, Height: 320},
		LevelDatum: &datum{Surface: "back plate"},
		Elements: []element{
			{Port: "1", SlantDeg: slants[0], XPDDB: ptr(32.0)},
			{Port: "2", SlantDeg: slants[1], XPDDB: ptr(32.0)},
		},
		PositionMM: plannedPlace(offsets{}),
		Azimuth:    plannedBearing(bearing),
		Tilt:       plannedAngle(tilt),
		Skew:       plannedAngle(0),
	}
}

func omni(id, port string, at offsets) antenna {
	return antenna{
		ID:         id,
		Pattern:    pattern{Kind: "omni", GainDBi: 8, BeamwidthElDeg: ptr(15.0)},
		SizeMM:     size{Width: 40, Height: 1100},
		Elements:   []element{{Port: port, SlantDeg: 0}},
		PositionMM: plannedPlace(at),
		Tilt:       plannedAngle(0),
		Skew:       plannedAngle(0),
	}
}

// reverse is the bearing back from the far end.
func reverse(bearing float64) float64 {
	if bearing < 180 {
		return bearing + 180
	}
	return bearing - 180
}

// crossedPairSheet is a link of two crossed panels on a radio that ties port to port. With measuredFar the other crew
// has read the far end already; else its plan stands with the doubt of a plan.
func crossedPairSheet(title string, bearing, elevation, distance float64, measuredFar bool) sheet {
	// ±45 facing ±45: the mirror makes +45 at one end and −45 at the other the same direction in space, so the far
	// panel's port 1 is the one at −45.
	far := crossedPanel("F", [2]float64{-45, 45}, reverse(bearing), -elevation)
	if measuredFar {
		far.Skew = far.Skew.measured(0.2, 0.3, "level", false)
		far.Tilt = far.Tilt.measured(-elevation+0.3, 0.3, "level", false)
		azimuth := far.Azimuth.measured(reverse(bearing)+0.5, 1, "landmark", true)
		far.Azimuth = &azimuth
	}
	return sheet{
		Sheet: 1, Title: title,
		Radio: radio{FrequencyMHz: 5800, BandwidthMHz: 40, Power: "per-chain", TxPowerDBm: []float64{20, 20},
			NoiseFigureDB: 6, SNRDB: ptr(25.0), Links: []link{{"1", "1"}, {"2", "2"}}},
		Near: end{[]antenna{crossedPanel("A", [2]float64{45, -45}, bearing, elevation)}},
		Far:  end{[]antenna{far}},
		Path: path{BearingDeg: bearing, ElevationDeg: elevation, DistanceM: distance},
		Surroundings: surroundings{Sight: true, Spreads: &spreads{Near: spread{8, 2}, Far: spread{10, 2}, KDB: ptr(12.0),
			XPRDB: 12, Spectrum: "laplacian"}},
		Limits: []limit{
			{Name: "effective_streams", AtLeast: ptr(1.8), Reason: "two streams were sold on this link"},
			{Name: "crosstalk_db", AtLeast: ptr(20.0), Reason: "this radio ties port to port: 20 dB of cross-talk leaves 18.8 of a 25 dB link"},
			{Name: "pointing_loss_db", AtMost: ptr(1.5), Reason: "the link budget keeps 1.5 dB for aim at both ends together"},
			{Name: "tilt_deviation_deg", AtMost: ptr(3.0), Reason: "the owner's drawing"},
		},
	}
}

// omniPairSheet is two like omnis set apart, on a radio that combines its chains, in streets without sight.
func omniPairSheet(title string, bearing, distance, apart, placeTolerance float64) sheet {
	return sheet{
		Sheet: 1, Title: title,
		Radio: radio{FrequencyMHz: 2450, BandwidthMHz: 20, Combining: true, Power: "per-chain", TxPowerDBm: []float64{23, 23},
			NoiseFigureDB: 7, SNRDB: ptr(20.0)},
		Near: end{[]antenna{omni("A", "1", offsets{}), omni("B", "2", offsets{Right: apart})}},
		Far:  end{[]antenna{omni("P", "1", offsets{}), omni("Q", "2", offsets{Right: 800})}},
		Path: path{BearingDeg: bearing, DistanceM: distance},
		Surroundings: surroundings{Class: &class{Standard: "3GPP TR 38.901", Edition: "V16.1.0", Scenario: "UMi",
			MastEnd: "near"}},
		Limits: []limit{
			{Name: "effective_streams", AtLeast: ptr(1.7), Reason: "the cell was planned with two streams"},
			{Name: "envelope_correlation", AtMost: ptr(0.5), Reason: "above 0.5 the second stream begins to go (common practice)"},
			{Name: "skew_deviation_deg", AtMost: ptr(4.0), Reason: "the owner's drawing: upright to the eye"},
			{Name: "tilt_deviation_deg", AtMost: ptr(4.0), Reason: "the owner's drawing: upright to the eye"},
			{Name: "position_deviation_mm", AtMost: &placeTolerance, Reason: "the bracket was reckoned for this spacing"},
		},
	}
}
