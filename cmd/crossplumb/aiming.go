package main

import (
	"encoding/json/jsontext"
	json "encoding/json/v2"
	"fmt"
	"math"

	"crossplumb/calc/wire"
	"crossplumb/db"
)

// What the demo knows of pointing beyond readings: where the ends stand, peak searches and the figures of the radios.
type (
	place struct {
		LatDeg  float64  `json:"lat_deg"`
		LonDeg  float64  `json:"lon_deg"`
		HeightM float64  `json:"height_m"`
		UM      *float64 `json:"u_m,omitempty"`
	}
	landmarkAt struct {
		Name string `json:"name"`
		place
	}
	obstacle struct {
		Name string  `json:"name"`
		AtM  float64 `json:"at_m"`
		TopM float64 `json:"top_m"`
	}
	radioPage struct {
		Ports         []chainFigures `json:"ports"`
		Streams       *float64       `json:"streams,omitempty"`
		Modulation    *float64       `json:"modulation_bits,omitempty"`
		PeerAsPlanned *bool          `json:"peer_as_planned,omitempty"`
	}
	chainFigures struct {
		Port         string   `json:"port"`
		LevelDBm     *float64 `json:"level_dbm,omitempty"`
		SNRDB        *float64 `json:"snr_db,omitempty"`
		XPIDB        *float64 `json:"xpi_db,omitempty"`
		ReturnLossDB *float64 `json:"return_loss_db,omitempty"`
	}
)

// searchRun is a peak search over a planted lobe: stepped from..to, with the top of the lobe and its width.
type searchRun struct {
	antenna, axis    string
	from, to, step   float64
	top, width, peak float64 // degrees, degrees, dBm

	beamwidth, expected, doubt float64 // what the phone knew: of the data sheet, and of the path
}

// pageRun is what one radio's page showed.
type pageRun struct {
	end  string
	page radioPage
}

// survey gives a sheet the places of both ends.
func (s sheet) survey(near, far place, obstacles []obstacle, landmarks []landmarkAt) sheet {
	s.Path.NearAt, s.Path.FarAt, s.Path.HeightDatum, s.Path.Obstacles = &near, &far, "mean sea level", obstacles
	s.Landmarks = landmarks
	return s
}

// back is the same link from its other end.
func (o obstacle) back(distance float64) obstacle { o.AtM = distance - o.AtM; return o }

// The places of the two links that are surveyed, as the coordinates of both ends come out at the bearings of their
// sheets (aim.target).
var (
	tollanAt = place{LatDeg: 46.131, LonDeg: -31.377, HeightM: 62, UM: ptr(3.0)}
	weirAt   = place{LatDeg: 46.146375, LonDeg: -31.39692, HeightM: 110.5, UM: ptr(3.0)}
	corrowAt = place{LatDeg: 46.139, LonDeg: -31.345, HeightM: 88, UM: ptr(3.0)}
	gannetAt = place{LatDeg: 46.133715, LonDeg: -31.368384, HeightM: 101.5, UM: ptr(3.0)}
	hollinAt = place{LatDeg: 46.104, LonDeg: -31.344, HeightM: 71, UM: ptr(3.0)}
	kilnAt   = place{LatDeg: 46.076055, LonDeg: -31.361877, HeightM: 53.9, UM: ptr(5.0)}

	chapelTower = landmarkAt{"chapel tower", place{LatDeg: 46.1212, LonDeg: -31.3904, HeightM: 58, UM: ptr(2.0)}}
	harbourLamp = landmarkAt{"harbour lamp", place{LatDeg: 46.1189, LonDeg: -31.3998, HeightM: 14, UM: ptr(2.0)}}
	warrenCairn = landmarkAt{"warren cairn", place{LatDeg: 46.1096, LonDeg: -31.3302, HeightM: 143, UM: ptr(5.0)}}
)

// crossedDish is a dish of 0.6 m with a crossed feed.
func crossedDish(id string, slants [2]float64, bearing, tilt float64) antenna {
	d := crossedPanel(id, slants, bearing, tilt)
	d.Pattern = pattern{Kind: "dish", GainDBi: 28, BeamwidthAzDeg: ptr(5.6), BeamwidthElDeg: ptr(5.6), FrontToBackDB: ptr(35.0), SidelobeDB: ptr(18.0)}
	d.SizeMM = size{Width: 620, Height: 620}
	d.LevelDatum = &datum{Surface: "feed flange"}
	return d
}

// dishLinkSheet is crossedPairSheet with dishes, whose beam is narrow enough to be lost on a side lobe.
func dishLinkSheet(title string, bearing, elevation, distance float64) sheet {
	s := crossedPairSheet(title, bearing, elevation, distance, true)
	near := crossedDish("A", [2]float64{45, -45}, bearing, elevation)
	far := crossedDish("F", [2]float64{-45, 45}, reverse(bearing), -elevation)
	azimuth := far.Azimuth.measured(reverse(bearing)+0.1, 0.3, "landmark", true)
	far.Skew, far.Tilt, far.Azimuth = s.Far.Antennas[0].Skew, far.Tilt.measured(-elevation, 0.2, "level", false), &azimuth
	s.Near, s.Far = end{[]antenna{near}}, end{[]antenna{far}}
	s.Radio.SNRDB = ptr(38.0)
	return s
}

// aim writes the peak searches of a mount, with power control said to be off before the first level.
func (s *simulator) aim(p *phone, job string, m mountRun) error {
	if len(m.searches) == 0 && len(m.pages) == 0 {
		return nil
	}
	// A stream of its own: what is aimed at one mast must not change what is read at the next.
	was := s.random
	s.random = s.aimed
	defer func() { s.random = was }()
	s.later(2, 4)
	p.write(s, job, m.id, db.PowerControlConfirmed, db.ControlOff{Name: p.owner.Name})
	for i, search := range m.searches {
		if err := s.search(p, job, m, search, i+1); err != nil {
			return err
		}
	}
	for _, run := range m.pages {
		s.later(3, 6)
		page, err := json.Marshal(run.page)
		if err != nil {
			return err
		}
		p.write(s, job, m.id, db.FiguresRead, db.RadioFigures{End: run.end, Page: page, Typed: jsontext.Value("{}")})
	}
	return nil
}

func (s *simulator) search(p *phone, job string, m mountRun, search searchRun, number int) error {
	var angles, levels []float64
	for a := search.from; a <= search.to+1e-9; a += search.step {
		s.later(0, 1)
		off := (a - search.top) / search.width
		shown := math.Round(search.peak - 12*off*off + 0.4*s.random.NormFloat64())
		typed := fmt.Sprintf("%s / %s", comma(math.Round(a*10)/10), comma(shown))
		p.write(s, job, m.id, db.LevelStepped, db.Step{Antenna: search.antenna, Axis: search.axis, Search: number,
			AngleDeg: math.Round(a*10) / 10, LevelDBm: shown, Typed: &typed})
		angles, levels = append(angles, math.Round(a*10)/10), append(levels, shown)
	}
	question, err := json.Marshal(map[string]any{"angles_deg": angles, "levels_dbm": levels, "power_control_off": true,
		"beamwidth_deg": search.beamwidth, "expected_level_dbm": search.expected, "expected_u_db": search.doubt})
	if err != nil {
		return err
	}
	answer, problem := wire.Reckon("peak.fit", question)
	if problem != nil {
		return fmt.Errorf("peak search: %s", problem.Error())
	}
	s.later(1, 2)
	p.write(s, job, m.id, db.PeakFitted, db.Peak{Antenna: search.antenna, Axis: search.axis, Search: number, Answer: answer})
	return nil
}

// figures is one port's line of a page.
func figures(port string, level, snr, xpi, returnLoss float64) chainFigures {
	return chainFigures{Port: port, LevelDBm: &level, SNRDB: &snr, XPIDB: &xpi, ReturnLossDB: &returnLoss}
}

// pageOf is a page that names the planned far radio.
func pageOf(end string, streams, bits float64, ports ...chainFigures) pageRun {
	return pageRun{end, radioPage{Ports: ports, Streams: &streams, Modulation: &bits, PeerAsPlanned: ptr(true)}}
}

// What stands in the surveyed paths, counted from the end that is named first.
var (
	quarryRim    = obstacle{"quarry rim", 260, 58}
	weirElms     = obstacle{"elms at the weir", 1750, 96}
	fuchsiaHedge = obstacle{"fuchsia hedge", 1120, 79}
)
