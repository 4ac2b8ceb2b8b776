package verdict

import (
	"strings"

	"crossplumb/calc/doubt"
	"crossplumb/calc/sheet"
)

// byCompass tells whether a method of reading a bearing goes by the earth's magnetic
// field, which steel turns by tens of degrees: a compass by whatever name, and the
// one that is built into a phone.
func byCompass(method string) bool {
	method = strings.ToLower(method)
	return strings.Contains(method, "compass") || strings.Contains(method, "magnet") || method == "phone"
}

// compassOnly tells whether the azimuth of a near body rests on compass readings
// alone. Such an azimuth counts with its doubt, but it finds gross errors only: it is
// never enough for go, because what turns a compass on a steel mast is in no
// reading's uncertainty.
func (m *model) compassOnly(i int, state sheet.State) bool {
	if state == sheet.Planned {
		return false
	}
	readings := m.bodies[i].antenna.Azimuth.At(state)
	for j := range readings {
		if !byCompass(readings[j].Method) {
			return false
		}
	}
	return len(readings) > 0
}

// sighted is the belief with every compass reading left out where a sight stands
// beside it, and the near bodies that this is about; nil where there is none.
func (m *model) sighted(b *belief) (*belief, []int) {
	var about []int
	c := *b
	for i := range m.near {
		if b.state == sheet.Planned || m.bodies[i].symmetric {
			continue
		}
		all, _ := m.readings(i, azimuth, b.state)
		var sights []doubt.Reading
		for j, r := range m.bodies[i].antenna.Azimuth.At(b.state) {
			if !byCompass(r.Method) {
				sights = append(sights, all[j])
			}
		}
		if len(sights) == 0 || len(sights) == len(all) {
			continue
		}
		if about == nil {
			c.est, c.surface = append([]doubt.Estimate(nil), b.est...), nil
		}
		about = append(about, i)
		c.est[m.at(i, azimuth)] = doubt.Pool(sights)
	}
	if about == nil {
		return nil, nil
	}
	return &c, about
}

// restingOnCompass lists the near bodies without whose compass readings the word
// would not be go: a rough sight must not lend its name to a compass.
func (j *judge) restingOnCompass(b *belief) []int {
	c, about := j.sighted(b)
	if c == nil || wordOf(j.runEvery(c, 1).joint) == Go {
		return nil
	}
	return about
}
