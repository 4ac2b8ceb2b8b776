package wire

import (
	"math"

	"crossplumb/calc/codec"
	"crossplumb/calc/polar"
)

func polarOperations() []operation {
	sources := []string{"IEEE Std 145", "Balanis, Antenna Theory, ch. 2"}
	return []operation{
		{"polarization.loss", polarizationLoss, sources},
		{"polarization.pair", polarizationPair, append(sources[:2:2], "Telatar 1999")},
	}
}

const degree = math.Pi / 180

// readPort reads a port as it stands in the small operations: slant, skew and
// ellipse together.
func readPort(f *codec.Fields) polar.Port {
	p := polar.Port{
		SlantRad: f.Number("slant_deg", codec.Between(-180, 180)) * degree,
		SkewRad:  f.NumberOr("skew_deg", 0, codec.Between(-180, 180)) * degree,
	}
	axial, hand := f.MaybeNumber("axial_ratio_db", codec.Between(0, 100)), f.MaybeChoice("hand", "right", "left")
	if (axial == nil) != (hand == "") {
		f.Fail(f.Refuse("hand", codec.Impossible, "axial_ratio_db and hand belong together: give both, or null for both where the port is linear"))
	}
	if axial != nil {
		p.Axial, p.LeftHand = polar.AxialFromDB(*axial), hand == "left"
	}
	return p
}

// decibels of a power ratio, at least floor: −0 and rounding above 1 stay out.
func decibels(ratio float64) float64 { return 10 * math.Log10(ratio) }

// lossDB is a loss from a factor that rounding may have left above one.
func lossDB(factor float64) float64 { return math.Max(0, -decibels(factor)) }

func polarizationLoss(v *codec.Value) (answer, *Problem) {
	f := codec.Open(v)
	var ends [2]polar.Port
	for i, name := range [2]string{"near", "far"} {
		if c := f.Child(name); c != nil {
			g := codec.Open(c)
			ends[i] = readPort(g)
			f.Fail(g.Done())
		}
	}
	if p := f.Done(); p != nil {
		return nil, p
	}
	factor := polar.LossFactor(ends[0], ends[1])
	blind := factor < polar.Blind
	loss := codec.Nothing()
	if blind {
		factor = 0
	} else {
		loss = codec.Num(lossDB(factor))
	}
	return codec.Obj(codec.M("factor", codec.Num(factor)), codec.M("loss_db", loss), codec.M("blind", codec.Truth(blind))), nil
}

// pairEnd is one end of a pair as it was read.
type pairEnd struct {
	ports  [2]polar.Ellipse
	labels [2]string
}

func readPairEnd(f *codec.Fields, name string) (end pairEnd) {
	items := f.Items(name, 2, 2)
	for i, item := range items {
		g := codec.Open(item)
		end.labels[i] = g.MaybeText("port")
		if end.labels[i] == "" {
			end.labels[i] = [2]string{"1", "2"}[i]
		}
		end.ports[i].Port = readPort(g)
		if x := g.MaybeNumber("xpd_db", codec.Between(0, 80)); x != nil {
			end.ports[i].Leak = polar.LeakFromDB(*x)
		}
		f.Fail(g.Done())
	}
	if f.Problem() == nil && len(items) == 2 && end.labels[0] == end.labels[1] && !items[0].Described() {
		f.Fail(items[1].Refuse(codec.Impossible, "both ports of this end have one label; give each its own"))
	}
	return end
}

// readPairLinks reads links [{near, far}, {near, far}] of the two ports; given is
// false where there are none.
func readPairLinks(f *codec.Fields, near, far pairEnd) (crossed, given bool) {
	items := f.MaybeItems("links", 2, 2)
	if items == nil {
		return false, false
	}
	at := func(labels [2]string, label string) int {
		for i, l := range labels {
			if l == label {
				return i
			}
		}
		return -1
	}
	var to [2]int
	for i := range to {
		to[i] = -1
	}
	for _, item := range items {
		g := codec.Open(item)
		nearLabel, farLabel := g.Text("near"), g.Text("far")
		if p := g.Done(); p != nil {
			f.Fail(p)
			return false, true
		}
		n, o := at(near.labels, nearLabel), at(far.labels, farLabel)
		switch {
		case item.Described():
		case n < 0:
			f.Fail(g.Refuse("near", codec.Impossible, "there is no near port of this label"))
		case o < 0:
			f.Fail(g.Refuse("far", codec.Impossible, "there is no far port of this label"))
		case to[n] >= 0:
			f.Fail(g.Refuse("near", codec.Impossible, "this port is linked twice; one port ties to one port"))
		default:
			to[n] = o
		}
	}
	if f.Problem() == nil && to[0] == to[1] && !items[0].Described() {
		f.Fail(items[1].Refuse(codec.Impossible, "both links go to one far port; one port ties to one port"))
	}
	return to[0] == 1, true
}

func polarizationPair(v *codec.Value) (answer, *Problem) {
	f := codec.Open(v)
	near, far := readPairEnd(f, "near"), readPairEnd(f, "far")
	crossed, given := readPairLinks(f, near, far)
	combining := f.TruthOr("combining", false)
	snr := f.MaybeNumber("snr_db", codec.Between(-40, 80))
	if p := f.Done(); p != nil {
		return nil, p
	}
	pair := polar.Pair{Near: near.ports, Far: far.ports, Crossed: crossed}
	byCoupling := pair.LargestCoupling()
	if !given {
		pair.Crossed = byCoupling
	}
	link := func(i int) int {
		if pair.Crossed {
			return 1 - i
		}
		return i
	}
	// Label to label: by the labels where both ends use the same two, else in order.
	swapped := pair.Crossed
	if near.labels[0] == far.labels[1] && near.labels[1] == far.labels[0] {
		swapped = !swapped
	}

	ports := codec.Seq()
	for e, end := range [2]*pairEnd{&near, &far} {
		other := [2]*pairEnd{&far, &near}[e]
		for i := range end.ports {
			r := pair.Receive(e == 0, i)
			blind := r.Coupling < polar.Blind
			o := codec.Obj(
				codec.M("end", codec.Str([2]string{"near", "far"}[e])),
				codec.M("port", codec.Str(end.labels[i])),
				codec.M("linked_to", codec.Str(other.labels[link(i)])),
				codec.M("blind", codec.Truth(blind)),
			)
			coupling, typical, worst, sinr := codec.Nothing(), codec.Nothing(), codec.Nothing(), codec.Nothing()
			if !blind {
				coupling = codec.Num(-lossDB(r.Coupling))
				if r.CrossTalk > 0 {
					typical, worst = codec.Num(-decibels(r.CrossTalk)), codec.Num(-decibels(r.CrossTalkMax))
				}
			}
			if snr != nil {
				s := math.Pow(10, *snr/10)
				x := r.SINR(s)
				if combining {
					x = pair.CombinedSINR(e == 0, link(i), s)
				}
				if x > polar.Blind*s {
					sinr = codec.Num(decibels(x))
				}
			}
			o.Set("coupling_db", coupling)
			o.Set("crosstalk_db", typical)
			o.Set("crosstalk_worst_db", worst)
			o.Set("sinr_db", sinr)
			ports.Items = append(ports.Items, o)
		}
	}

	links := codec.Seq()
	for i := range near.labels {
		links.Items = append(links.Items, codec.Obj(codec.M("near", codec.Str(near.labels[i])), codec.M("far", codec.Str(far.labels[link(i)]))))
	}
	out := codec.Obj(
		codec.M("ports", ports),
		codec.M("links", links),
		codec.M("swapped", codec.Truth(swapped)),
		codec.M("links_by_coupling", codec.Truth(pair.Crossed == byCoupling)),
	)
	for e, end := range [2]*pairEnd{&near, &far} {
		name := [2]string{"", "far_"}[e]
		angle := codec.Nothing()
		if end.ports[0].Axial == 0 && end.ports[1].Axial == 0 {
			angle = codec.Num(polar.AngleBetween(end.ports[0].Port, end.ports[1].Port) / degree)
		}
		out.Set(name+"pair_angle_deg", angle)
		out.Set(name+"residual", codec.Num(polar.Residual(end.ports[0].Port, end.ports[1].Port)))
	}
	now, ideal := codec.Nothing(), codec.Nothing()
	if snr != nil {
		s := math.Pow(10, *snr/10)
		aligned := truePair(pair)
		if combining {
			now, ideal = codec.Num(pair.CombiningBits(s)), codec.Num(aligned.CombiningBits(s))
		} else {
			now, ideal = codec.Num(pair.TiedBits(s)), codec.Num(aligned.TiedBits(s))
		}
	}
	out.Set("bits_per_s_hz", now)
	out.Set("true_pair_bits_per_s_hz", ideal)
	return out, nil
}

// truePair is the same four ports, each with its own discrimination, hung true:
// linear, square, turned right against the far end.
func truePair(p polar.Pair) polar.Pair {
	set := func(e *polar.Ellipse, slant float64) { e.Port = polar.Port{SlantRad: slant} }
	a, b := 0.0, math.Pi/2
	set(&p.Near[0], a)
	set(&p.Near[1], b)
	if p.Crossed {
		a, b = b, a
	}
	set(&p.Far[0], a)
	set(&p.Far[1], b)
	return p
}
