package wire

import (
	"math"

	"crossplumb/calc/codec"
	"crossplumb/calc/sheet"
	"crossplumb/calc/stream"
)

func streamOperations() []operation {
	return []operation{
		{"stream.capacity", streamCapacity, []string{
			"Telatar, Eur. Trans. Telecommun. 10 (1999)", "Kermoal et al., IEEE J. Sel. Areas Commun. 20 (2002)",
			"Joe and Kuo, SIAM J. Sci. Comput. 30 (2008), scrambled after Matoušek (1998)", "Shiu et al. 2000 (effective streams)",
		}},
		{"stream.limit", streamLimit, []string{
			"Bøhagen, Orten and Øien, IEEE Trans. Wireless Commun. 6 (2007)", "Sarris and Nix, IEEE Trans. Veh. Technol. 56 (2007)",
		}},
	}
}

// mostRows bounds correlation matrices and rows of elements: twice what a mount carries, so that published tables of
// larger arrays can be checked.
const mostRows = 16

// readCorrelation reads rows of [re, im] and refuses what is no correlation matrix.
func readCorrelation(f *codec.Fields, name string) []complex128 {
	rows := f.Items(name, 1, mostRows)
	var out []complex128
	for _, row := range rows {
		cells, p := row.AsList(len(rows), len(rows))
		f.Fail(p)
		for _, cell := range cells {
			z, p := cell.AsNumbers(2, 2, codec.Between(-1.001, 1.001))
			f.Fail(p)
			if p == nil && len(z) == 2 {
				out = append(out, complex(z[0], z[1]))
			}
		}
	}
	if f.Problem() == nil && len(rows) > 0 && !rows[0].Described() {
		if err := stream.CheckCorrelation(out); err != nil {
			f.Fail(f.Refuse(name, codec.Impossible, err.Error()))
		}
	}
	return out
}

// snrRange is what a signal-to-noise ratio in dB may be: beyond it no radio works, and below nothing gets through.
var snrRange = codec.Range{Min: -40, Max: 80, Suggestion: "the signal-to-noise ratio in dB"}

func ratio(db float64) float64 { return math.Pow(10, db/10) }

func streamCapacity(v *codec.Value) (answer, *Problem) {
	f := codec.Open(v)
	near, far := readCorrelation(f, "near_correlation"), readCorrelation(f, "far_correlation")
	snr := f.Number("snr_db", snrRange)
	power := stream.PerChain
	if f.Choice("power", sheet.PerChain, sheet.Shared) == sheet.Shared {
		power = stream.Shared
	}
	if p := f.Done(); p != nil {
		return nil, p
	}
	c, err := stream.Kronecker(near, far, ratio(snr), power)
	if err != nil {
		return nil, &Problem{Code: codec.Impossible, Message: err.Error()}
	}
	return codec.Obj(
		codec.M("bits_per_s_hz", codec.Num(c.BitsPerSHz)),
		codec.M("standard_error", codec.Num(c.StandardError)),
		codec.M("single_chain_bits_per_s_hz", codec.Num(c.SingleChain)),
		codec.M("rate_multiple", codec.Num(c.RateMultiple)),
		codec.M("effective_streams", codec.Num(c.EffectiveStreams)),
	), nil
}

// readElements reads a list of [right, up, forward] in metres.
func readElements(f *codec.Fields, name string) [][3]float64 {
	var out [][3]float64
	for _, item := range f.Items(name, 1, mostRows) {
		p, problem := item.AsNumbers(3, 3, codec.Between(-10000, 10000))
		f.Fail(problem)
		if problem == nil && len(p) == 3 {
			out = append(out, [3]float64{p[0], p[1], p[2]})
			for i := range out[:len(out)-1] {
				if out[i] == out[len(out)-1] && !item.Described() {
					f.Fail(item.Refuse(codec.Impossible, "two elements stand in one place; correct the position of one"))
				}
			}
		}
	}
	return out
}

func streamLimit(v *codec.Value) (answer, *Problem) {
	f := codec.Open(v)
	near, far := readElements(f, "near"), readElements(f, "far")
	distance := f.Number("distance_m", codec.Range{Min: 1, Max: 1e6, Suggestion: "the distance between the ends in metres"})
	radio := sheet.Radio{FrequencyMHz: f.Number("frequency_mhz", sheet.FrequencyMHz)}
	snr := f.Number("snr_db", snrRange)
	if p := f.Done(); p != nil {
		return nil, p
	}
	wavelength := radio.WavelengthM()
	l, err := stream.LineOfSight(near, far, distance, wavelength, ratio(snr))
	if err != nil {
		return nil, &Problem{Code: codec.Impossible, Field: "distance_m", Message: err.Error()}
	}
	condition, spacing, product := codec.Nothing(), codec.Nothing(), codec.Nothing()
	if l.ConditionDB < 250 { // the smallest singular value is above rounding
		condition = codec.Num(l.ConditionDB)
	}
	if n := max(len(near), len(far)); n > 1 {
		d := stream.BestSpacing(n, distance, wavelength)
		spacing, product = codec.Num(d), codec.Num(d*d)
	}
	return codec.Obj(
		codec.M("bits_per_s_hz", codec.Num(l.BitsPerSHz)),
		codec.M("condition_db", condition),
		codec.M("effective_streams", codec.Num(l.EffectiveStreams)),
		codec.M("best_spacing_m", spacing),
		codec.M("best_product_m2", product),
	), nil
}
