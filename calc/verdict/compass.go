package verdict

import "crossplumb/calc/sheet"

// compass is the method of a reading that steel turns by tens of degrees.
const compass = "compass"

// byCompassOnly tells whether the azimuth of a near body rests on compass readings
// alone. Such an azimuth counts with its doubt, but it finds gross errors only: it is
// never enough for go, because what turns a compass on a steel mast is in no
// reading's uncertainty.
func (m *model) byCompassOnly(i int, state sheet.State) bool {
	if state == sheet.Planned {
		return false
	}
	readings := m.bodies[i].antenna.Azimuth.At(state)
	for j := range readings {
		if readings[j].Method != compass {
			return false
		}
	}
	return len(readings) > 0
}
