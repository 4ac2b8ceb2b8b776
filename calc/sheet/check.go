package sheet

import (
	"math"

	"crossplumb/calc/codec"
)

// check refuses what no single field shows: names that stand twice, links to
// ports that are not there, bodies in one place.
func (s *Sheet) check(v *codec.Value) *codec.Problem {
	for _, end := range []struct {
		name string
		m    *Mount
	}{{"near", &s.Near}, {"far", &s.Far}} {
		if p := end.m.check(v.Get(end.name).Get("antennas")); p != nil {
			return p
		}
	}
	if n := len(s.Radio.TxPowerDBm); n > 1 && n != s.Near.Ports() {
		return v.Get("radio").Get("tx_power_dbm").Refuse(codec.Impossible, "give one power for all chains, or one for each near port")
	}
	return s.checkLinks(v.Get("radio").Get("links"))
}

func (s *Sheet) checkLinks(v *codec.Value) *codec.Problem {
	nearSeen, farSeen := map[string]bool{}, map[string]bool{}
	for i, l := range s.Radio.Links {
		item := v.Items[i]
		for _, side := range []struct {
			name, port string
			m          *Mount
			seen       map[string]bool
		}{{"near", l.Near, &s.Near, nearSeen}, {"far", l.Far, &s.Far, farSeen}} {
			if !side.m.hasPort(side.port) {
				return item.Get(side.name).Refuse(codec.Impossible, "there is no port of this label at this end")
			}
			if side.seen[side.port] {
				return item.Get(side.name).Refuse(codec.Impossible, "this port is linked twice; one port ties to one port")
			}
			side.seen[side.port] = true
		}
	}
	return nil
}

// Ports is how many ports the mount has.
func (m *Mount) Ports() int {
	n := 0
	for i := range m.Antennas {
		n += len(m.Antennas[i].Elements)
	}
	return n
}

func (m *Mount) hasPort(label string) bool {
	for i := range m.Antennas {
		for j := range m.Antennas[i].Elements {
			if m.Antennas[i].Elements[j].Port == label {
				return true
			}
		}
	}
	return false
}

// samePlaceMM is how near two antennas' centres may be planned before the sheet
// is refused: less than any antenna is thick.
const samePlaceMM = 1

func (m *Mount) check(v *codec.Value) *codec.Problem {
	ids, ports := map[string]bool{}, map[string]bool{}
	for i := range m.Antennas {
		a, item := &m.Antennas[i], v.Items[i]
		if ids[a.ID] {
			return item.Get("id").Refuse(codec.Impossible, "two antennas have this name; give each its own")
		}
		ids[a.ID] = true
		for j := range a.Elements {
			e := &a.Elements[j]
			if ports[e.Port] {
				return item.Get("elements").Items[j].Get("port").Refuse(codec.Impossible, "two ports of this end have this label; give each its own")
			}
			ports[e.Port] = true
			for k := 0; k < j; k++ {
				if e.sameAs(&a.Elements[k]) {
					return item.Get("elements").Items[j].Refuse(codec.Impossible, "two elements stand in one place with one polarization; correct slant or offset")
				}
			}
		}
		for k := 0; k < i; k++ {
			b := &m.Antennas[k]
			p, q := a.Position.Planned, b.Position.Planned
			if math.Abs(*p.Right-*q.Right) < samePlaceMM && math.Abs(*p.Up-*q.Up) < samePlaceMM && math.Abs(*p.Forward-*q.Forward) < samePlaceMM {
				return item.Get("position_mm").Get("planned").Get("value").Refuse(codec.Impossible, "two antennas are planned in one place; correct the position of one")
			}
		}
	}
	return nil
}

func (e *Element) sameAs(o *Element) bool {
	d := math.Remainder(e.SlantDeg-o.SlantDeg, 180)
	return e.OffsetMM == o.OffsetMM && math.Abs(d) < 1e-9 && e.Hand == o.Hand
}
