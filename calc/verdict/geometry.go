package verdict

import (
	"math"

	"crossplumb/calc/sheet"
)

// Geometry is how the near antennas hang in each state, for the drawing.
type Geometry struct {
	Antennas     []AntennaGeometry
	WavelengthMM float64
	Spacings     []Spacing
}

// AntennaGeometry is one antenna in its states; nil where a state has no reading
// of it.
type AntennaGeometry struct {
	ID      string
	Planned Place
	AsFound *Place
	AsLeft  *Place
}

// Place is where an antenna is and how it hangs, in border units, with the
// standard uncertainties beside.
type Place struct {
	RightMM, UpMM, ForwardMM, AzimuthDeg, TiltDeg, SkewDeg       float64
	URightMM, UUpMM, UForwardMM, UAzimuthDeg, UTiltDeg, USkewDeg float64
}

// Spacing is the distance of two antennas' centres in the state judged.
type Spacing struct {
	From, To    string
	MM          float64
	Wavelengths float64
}

func (j *judge) geometry(beliefs [3]*belief, judged sheet.State) Geometry {
	wavelength := j.sheet.Radio.WavelengthM()
	g := Geometry{WavelengthMM: wavelength * 1000}
	for i := range j.near {
		a := AntennaGeometry{ID: j.bodies[i].antenna.ID, Planned: j.place(j.plan, nil, i)}
		if beliefs[sheet.AsFound].stands {
			p := j.place(beliefs[sheet.AsFound].values(), beliefs[sheet.AsFound], i)
			a.AsFound = &p
		}
		if beliefs[sheet.AsLeft].stands {
			p := j.place(beliefs[sheet.AsLeft].values(), beliefs[sheet.AsLeft], i)
			a.AsLeft = &p
		}
		g.Antennas = append(g.Antennas, a)
	}
	x := beliefs[judged].values()
	for i := range j.near {
		for k := i + 1; k < j.near; k++ {
			d := j.distance(x, i, k)
			g.Spacings = append(g.Spacings, Spacing{j.bodies[i].antenna.ID, j.bodies[k].antenna.ID, d * 1000, d / wavelength})
		}
	}
	return g
}

func (j *judge) place(x []float64, b *belief, i int) Place {
	get := func(q quantity) float64 { return x[j.at(i, q)] }
	turn := math.Mod(j.bearing(false)+get(azimuth)/degree, 360)
	if turn < 0 {
		turn += 360
	}
	p := Place{
		RightMM: get(right) * 1000, UpMM: get(up) * 1000, ForwardMM: get(forward) * 1000,
		AzimuthDeg: turn, TiltDeg: get(tilt) / degree, SkewDeg: get(skew) / degree,
	}
	if b != nil {
		u := func(q quantity) float64 { return b.est[j.at(i, q)].U() }
		p.URightMM, p.UUpMM, p.UForwardMM = u(right)*1000, u(up)*1000, u(forward)*1000
		p.UAzimuthDeg, p.UTiltDeg, p.USkewDeg = u(azimuth)/degree, u(tilt)/degree, u(skew)/degree
	}
	return p
}
