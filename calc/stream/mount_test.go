package stream

import (
	"math"
	"math/cmplx"
	"math/rand/v2"
	"testing"

	"pgregory.net/rapid"

	"crossplumb/calc/antenna"
	"crossplumb/calc/scatter"
)

func omni(right, up, forward float64) antenna.Body {
	return antenna.Body{
		Pattern: &antenna.Pattern{Kind: antenna.Omni, BeamwidthEl: 20 * degree, Sidelobe: 20},
		Right:   right, Up: up, Forward: forward, Ports: make([]antenna.Port, 1),
	}
}

func planned(t testing.TB, s Setup, near, far []antenna.Body) Result {
	t.Helper()
	e, err := New(s, near, far)
	if err != nil {
		t.Fatal(err)
	}
	return e.Planned()
}

// sightOnly is a link with nothing but the direct path.
func sightOnly(db float64) Setup {
	s := link(scatter.Surroundings{Sight: true, K: math.Inf(1)}, db)
	return s
}

// TestWhatMatters holds what the trade knows about mounts. Where no source stands the figure is common practice, or follows
// from the formulas of the package documentation as said.
func TestWhatMatters(t *testing.T) {
	t.Run("a crossed pair rotated 8° costs a combining radio nothing", func(t *testing.T) { // common practice; unitary mixture
		near, far := row(1, 0)
		e, err := New(link(class(scatter.RuralMacro, true), 25), near, far)
		if err != nil {
			t.Fatal(err)
		}
		near[0].Skew = 8 * degree
		r := e.Evaluate(near, far)
		// The beam turns with the body, so not quite nothing.
		if d := e.Planned().BitsPerSHz - r.BitsPerSHz; math.Abs(d) > 0.02 {
			t.Errorf("8° move the rate by %.4f bit/s/Hz", d)
		}
		if r.EffectiveStreams < 1.95 {
			t.Errorf("%v streams", r.EffectiveStreams)
		}
	})
	t.Run("±45° against horizontal and vertical: two full streams", func(t *testing.T) { // common practice
		near, far := row(1, 0)
		far[0].Ports = []antenna.Port{{Slant: 90 * degree}, {}}
		r := planned(t, sightOnly(25), near, far)
		if want := 2 * math.Log2(1+linear(25)); math.Abs(r.BitsPerSHz-want) > 1e-6 || r.EffectiveStreams < 1.99 {
			t.Errorf("%v bit/s/Hz, want %v; %v streams", r.BitsPerSHz, want, r.EffectiveStreams)
		}
	})
	t.Run("+45° facing +45° is cross-polar", func(t *testing.T) { // mirror
		near, far := row(1, 0)
		r := planned(t, sightOnly(25), near, far)
		if r.MeanPower[0][0] > 1e-12 || math.Abs(r.MeanPower[1][0]-1) > 1e-6 {
			t.Errorf("mean power %v", r.MeanPower)
		}
	})
	t.Run("two omnis half a wavelength apart at 20 dB", func(t *testing.T) { // common practice
		side := []antenna.Body{omni(0, 0, 0), omni(lambda/2, 0, 0)}
		in := planned(t, link(class(scatter.RuralMacro, true), 20), side, side)
		out := planned(t, link(class(scatter.UrbanMicro, false), 20), side, side)
		if in.EffectiveStreams > 1.45 || in.EffectiveStreams < 1.3 {
			t.Errorf("RMa with sight: %.3f streams, want about 1.4", in.EffectiveStreams)
		}
		if out.EffectiveStreams < 1.85 || out.EffectiveStreams > 2 {
			t.Errorf("UMi without: %.3f streams, want about 1.9", out.EffectiveStreams)
		}
		for _, around := range []scatter.Surroundings{class(scatter.RuralMacro, true), class(scatter.UrbanMicro, false)} {
			end := []antenna.Body{omni(0, 0, 0), omni(0, 0, lambda/2)}
			broad, along := planned(t, link(around, 20), side, side), planned(t, link(around, 20), end, end)
			if along.EffectiveStreams > broad.EffectiveStreams-0.25 || along.BitsPerSHz > broad.BitsPerSHz-0.5 {
				t.Errorf("end-on to the arrivals: %.3f streams against %.3f broadside", along.EffectiveStreams, broad.EffectiveStreams)
			}
		}
	})
	t.Run("stacked omnis do not help where the spread is flat", func(t *testing.T) { // common practice
		around := scatter.Surroundings{XPR: linear(9)}
		around.Near, around.Far = scatter.Angular{AzimuthSpread: 30 * degree, ElevationSpread: 0.5 * degree}, scatter.Angular{AzimuthSpread: 30 * degree, ElevationSpread: 0.5 * degree}
		one := []antenna.Body{omni(0, 0, 0)}
		stacked := []antenna.Body{omni(0, 0, 0), omni(0, 2*lambda, 0)}
		beside := []antenna.Body{omni(0, 0, 0), omni(2*lambda, 0, 0)}
		alone := planned(t, link(around, 20), one, one)
		up, across := planned(t, link(around, 20), stacked, stacked), planned(t, link(around, 20), beside, beside)
		if up.EffectiveStreams > alone.EffectiveStreams+0.25 || up.NearEnvelope < 0.9 {
			t.Errorf("stacked: %.3f streams, envelope %.3f", up.EffectiveStreams, up.NearEnvelope)
		}
		if across.EffectiveStreams < 1.85 || across.NearEnvelope > 0.1 {
			t.Errorf("side by side: %.3f streams, envelope %.3f", across.EffectiveStreams, across.NearEnvelope)
		}
	})
	t.Run("four crossed panels carry up to eight, as their spacing gives", func(t *testing.T) { // two per place at most
		narrow := scatter.Angular{AzimuthSpread: 3 * degree, ElevationSpread: 1 * degree}
		around := scatter.Surroundings{XPR: linear(9), Near: narrow, Far: narrow}
		last := 0.0
		for _, step := range []float64{0.05, 0.15, 1} {
			near, far := row(4, step)
			r := planned(t, link(around, 25), near, far)
			if r.EffectiveStreams < last+0.2 || r.EffectiveStreams > 8 {
				t.Errorf("%v m apart: %.3f streams, %.3f before", step, r.EffectiveStreams, last)
			}
			last = r.EffectiveStreams
		}
		if last < 7.5 {
			t.Errorf("1 m apart: %.3f streams", last)
		}
		near, far := row(4, 0.1)
		if r := planned(t, sightOnly(25), near, far); r.EffectiveStreams > 2.2 {
			t.Errorf("in bare sight: %.3f streams, want the two polarizations", r.EffectiveStreams)
		}
	})
	t.Run("orthogonal polarizations never give more than two", func(t *testing.T) {
		near, far := row(1, 0)
		near[0].Ports = append(near[0].Ports, antenna.Port{})
		if r := planned(t, link(class(scatter.UrbanMicro, false), 25), near, far); r.EffectiveStreams > 2 {
			t.Errorf("three ports in one place: %v streams", r.EffectiveStreams)
		}
	})
	t.Run("reflectors ever farther: the second stream fades", func(t *testing.T) { // Tse and Viswanath ch. 7
		// One wavelength apart, so that no direction is taken for another. Seen from the far end the reflector closes up to the
		// direct path as 60 m/D.
		two := []antenna.Body{omni(0, 0, 0), omni(lambda, 0, 0)}
		last := 2.0
		for _, d := range []float64{250, 1000, 4000, 16000, 64000} {
			s := link(scatter.Surroundings{Sight: true, Reflectors: []scatter.Reflector{{Right: 60, Forward: 150, Amplitude: math.Sqrt2 / 2}}}, 20)
			s.Distance = d
			r := planned(t, s, two, two)
			if r.EffectiveStreams > last {
				t.Errorf("%v m: %.3f streams, %.3f nearer", d, r.EffectiveStreams, last)
			}
			last = r.EffectiveStreams
			if d == 250 && last < 1.7 {
				t.Errorf("near: %.3f streams", last)
			}
		}
		if last > 1.2 {
			t.Errorf("far: %.3f streams left", last)
		}
	})
	t.Run("d·d = λR/2 is full rank with no scatter at all", func(t *testing.T) { // Bøhagen et al. 2007
		d := BestSpacing(2, 1900, lambda)
		two := []antenna.Body{omni(0, 0, 0), omni(d, 0, 0)}
		r := planned(t, sightOnly(20), two, two)
		if want := 2 * math.Log2(1+2*100.0); math.Abs(r.BitsPerSHz-want) > 1e-3 {
			t.Errorf("%v bit/s/Hz, want %v", r.BitsPerSHz, want)
		}
		// It needs the product alone: half here, twice there.
		r = planned(t, sightOnly(20), []antenna.Body{omni(0, 0, 0), omni(d/2, 0, 0)}, []antenna.Body{omni(0, 0, 0), omni(2*d, 0, 0)})
		if want := 2 * math.Log2(1+2*100.0); math.Abs(r.BitsPerSHz-want) > 1e-3 {
			t.Errorf("unequal: %v bit/s/Hz, want %v", r.BitsPerSHz, want)
		}
	})
	t.Run("rate multiple holds array gain", func(t *testing.T) { // two chains in phase at low SNR: 4 times one
		two := []antenna.Body{omni(0, 0, 0), omni(lambda/2, 0, 0)}
		if r := planned(t, sightOnly(-30), two, two); math.Abs(r.RateMultiple-4) > 0.01 {
			t.Errorf("%v", r.RateMultiple)
		}
	})
}

func TestPointing(t *testing.T) {
	near, far := row(1, 0)
	s := sightOnly(20)
	s.Elevation = 2 * degree
	near[0].Tilt, far[0].Tilt = 2*degree, -2*degree
	e, err := New(s, near, far)
	if err != nil {
		t.Fatal(err)
	}
	if p := e.Planned(); p.NearPointing[0] > 1e-4 || p.FarPointing[0] > 1e-4 {
		t.Errorf("aimed: %v %v", p.NearPointing, p.FarPointing)
	}
	near[0].Azimuth = 32.5 * degree // half the width: 3 dB, TR 38.901 table 7.3-1
	far[0].Tilt += 4 * degree
	r := e.Evaluate(near, far)
	if math.Abs(r.NearPointing[0]-3) > 0.02 || math.Abs(r.FarPointing[0]-3) > 0.02 {
		t.Errorf("turned: %v %v, want 3", r.NearPointing, r.FarPointing)
	}
	if got := -10 * math.Log10(r.MeanPower[1][0]); math.Abs(got-6) > 0.05 {
		t.Errorf("power falls by %v dB, want 6", got)
	}
}

// TestMeanPowerIsPatternsTimesSpectra: narrow beams capture less scatter, by the same factor at both ends at once.
func TestMeanPowerIsPatternsTimesSpectra(t *testing.T) {
	dish := func(width float64) []antenna.Body {
		return []antenna.Body{{Pattern: &antenna.Pattern{Kind: antenna.Panel, BeamwidthAz: width, BeamwidthEl: 2 * math.Pi, FrontToBack: 60, Sidelobe: 60}, Ports: make([]antenna.Port, 1)}}
	}
	around := scatter.Surroundings{XPR: math.Inf(1), Near: scatter.Angular{AzimuthSpread: 30 * degree}, Far: scatter.Angular{AzimuthSpread: 30 * degree}}
	// Power pattern 10^(−1.2 (x/w)²) under a Laplacian of σ = 30°: 6.7 dB for w = 10° (scatter.TestNarrowBeamsCaptureLess).
	r := planned(t, link(around, 20), dish(10*degree), dish(10*degree))
	if db := -10 * math.Log10(r.MeanPower[0][0]); math.Abs(db-13.4) > 0.2 {
		t.Errorf("two 10° beams in 30° of spread lose %.2f dB, want 13.4", db)
	}
}

// rays draws channels the slow way: hundreds of single plane waves, each from a direction of the near spectrum into one of
// the far spectrum with four independent polarization amplitudes, through the antennas' fields one by one. It shares the
// antennas with the engine, and nothing of covariances, quadrature, factors, twins or random points.
type rays struct {
	s         Setup
	near, far []antenna.Body
	random    *rand.Rand
	n         int
}

func (m *rays) direction(a *scatter.Angular) antenna.Direction {
	laplacian := func(sigma float64) float64 {
		x := m.random.ExpFloat64() * sigma / math.Sqrt2
		if m.random.IntN(2) == 0 {
			return -x
		}
		return x
	}
	draw := func(form scatter.Form, sigma, mean, half float64, about float64) float64 {
		for {
			x := laplacian(sigma)
			if form == scatter.Gaussian {
				x = m.random.NormFloat64() * sigma
			}
			if math.Abs(x+mean-about) <= half {
				return x + mean
			}
		}
	}
	return antenna.Toward(draw(a.AzimuthForm, a.AzimuthSpread, a.AzimuthMean, math.Pi, a.AzimuthMean), draw(a.ElevationForm, a.ElevationSpread, a.ElevationMean, math.Pi/2, 0))
}

func fieldsAt(bodies []antenna.Body, d *antenna.Direction, k float64) (v, h []complex128) {
	for b := range bodies {
		for i := range bodies[b].Ports {
			fv, fh := bodies[b].Field(i, d)
			r, u, f := bodies[b].PortPosition(i)
			p := cmplx.Rect(1, k*(r*d.Right+u*d.Up+f*d.Forward))
			v, h = append(v, fv*p), append(h, fh*p)
		}
	}
	return v, h
}

func (m *rays) draw(h []complex128, nf int) {
	clear(h)
	k := 2 * math.Pi / m.s.Wavelength
	x := m.s.Around.XPR
	unit := func(power float64) complex128 {
		return complex(m.random.NormFloat64(), m.random.NormFloat64()) * complex(math.Sqrt(power/2/float64(m.n)), 0)
	}
	for range m.n {
		dn, df := m.direction(&m.s.Around.Near), m.direction(&m.s.Around.Far)
		nv, nh := fieldsAt(m.near, &dn, k)
		fv, fh := fieldsAt(m.far, &df, k)
		vv, hh, vh, hv := unit(x/(1+x)), unit(x/(1+x)), unit(1/(1+x)), unit(1/(1+x))
		for n := range nv {
			for f := range fv {
				h[n*nf+f] += fv[f]*(vv*nv[n]+vh*nh[n]) + fh[f]*(hv*nv[n]+hh*nh[n])
			}
		}
	}
	if !m.s.Around.Sight {
		return
	}
	kk := m.s.Around.K
	for i := range h {
		h[i] *= complex(math.Sqrt(1/(1+kk)), 0)
	}
	// The direct path by plain geometry: positions in one frame, distance by Pythagoras, fields along the line.
	d0 := m.s.Distance
	se, ce := math.Sincos(m.s.Elevation)
	i := 0
	for b := range m.near {
		for p := range m.near[b].Ports {
			r, u, f := m.near[b].PortPosition(p)
			for c := range m.far {
				for q := range m.far[c].Ports {
					fr, fu, ff := m.far[c].PortPosition(q)
					x, y, z := -fr-r, d0*se+fu-u, d0*ce-ff-f
					d := math.Sqrt(x*x + y*y + z*z)
					toward, back := antenna.Toward(math.Atan2(x, z), math.Asin(y/d)), antenna.Toward(math.Atan2(x, z), math.Asin(-y/d))
					nv, nh := m.near[b].Field(p, &toward)
					fv, fh := m.far[c].Field(q, &back)
					h[i] += complex(math.Sqrt(kk/(1+kk))*d0/d, 0) * cmplx.Exp(complex(0, -k*(d-d0))) * (fv*nv - fh*nh)
					i++
				}
			}
		}
	}
}

func TestEngineAgainstRays(t *testing.T) {
	tilted := func(b antenna.Body, az, tilt, skew float64) antenna.Body {
		b.Azimuth, b.Tilt, b.Skew = az*degree, tilt*degree, skew*degree
		return b
	}
	urban := class(scatter.UrbanMicro, false)
	rural := class(scatter.RuralMacro, true)
	typed := scatter.Surroundings{Sight: true, K: linear(3), XPR: linear(6), Near: scatter.Angular{AzimuthSpread: 12 * degree, ElevationSpread: 4 * degree, ElevationMean: 2 * degree}, Far: scatter.Angular{AzimuthSpread: 25 * degree, ElevationSpread: 3 * degree, ElevationMean: -2 * degree}}
	leaky := panel(0.2, 0)
	leaky.Ports = []antenna.Port{{Slant: 40 * degree, Leak: 0.1}, {Slant: -45 * degree, Axial: 0.3, Hand: antenna.Left, Up: 0.05}}
	for name, c := range map[string]struct {
		around    scatter.Surroundings
		near, far []antenna.Body
	}{
		"one crossed panel, no sight":               {urban, []antenna.Body{panel(0, 0)}, []antenna.Body{panel(0, 0)}},
		"two crossed panels askew, rural":           {rural, []antenna.Body{tilted(panel(0, 0), 5, -2, 7), tilted(panel(0.31, 0.02), -8, 1, -12)}, []antenna.Body{panel(0, 0), tilted(panel(0.4, 0), 3, 2, 0)}},
		"odd ports, typed spreads":                  {typed, []antenna.Body{tilted(panel(0, 0), 2, 3, 30), tilted(leaky, 0, 0, -20)}, []antenna.Body{omni(0, 0, 0), omni(0.03, 0.02, 0.01)}},
		"omnis half a wavelength apart, no sight":   {urban, []antenna.Body{omni(0, 0, 0), omni(lambda/2, 0, 0)}, []antenna.Body{omni(0, 0, 0), omni(0, 0, lambda/2)}},
		"one against two, rural, per-chain power 3": {rural, []antenna.Body{omni(0, 0, 0)}, []antenna.Body{panel(0, 0)}},
	} {
		t.Run(name, func(t *testing.T) {
			t.Parallel()
			s := link(c.around, 22)
			s.Elevation = 1.5 * degree
			e, err := New(s, c.near, c.far)
			if err != nil {
				t.Fatal(err)
			}
			r := e.Planned()
			nn, nf := len(e.near.ports), len(e.far.ports)
			m := &rays{s: s, near: c.near, far: c.far, random: rand.New(rand.NewPCG(1, 2)), n: 40}
			const draws = 4000
			h := make([]complex128, nn*nf)
			ch := newChannel(nf, nn, 0)
			var sum, sum2, dof, dof2 float64
			power, power2 := make([]float64, nn*nf), make([]float64, nn*nf)
			for range draws {
				m.draw(h, nf)
				copy(ch.h, h)
				b, d := ch.rate(s.SNR)
				sum, sum2, dof, dof2 = sum+b, sum2+b*b, dof+d, dof2+d*d
				for i, z := range h {
					power[i] += abs2(z)
					power2[i] += abs2(z) * abs2(z)
				}
			}
			within := func(sum, sum2 float64) (mean, se float64) {
				mean = sum / draws
				return mean, math.Sqrt((sum2/draws - mean*mean) / draws)
			}
			// A finite number of rays is not quite Gaussian: fourth moments are off by a part in 40, which moves rates by less
			// than 0.02 (checked by halving the number).
			mean, se := within(sum, sum2)
			if d := math.Abs(mean - r.BitsPerSHz); d > 4*math.Hypot(se, r.StandardError)+0.02 {
				t.Errorf("rays %.3f ± %.3f bit/s/Hz, engine %.3f ± %.3f", mean, se, r.BitsPerSHz, r.StandardError)
			}
			mean, se = within(dof, dof2)
			if d := math.Abs(mean - r.EffectiveStreams); d > 4*math.Hypot(se, r.StreamsError)+0.005 {
				t.Errorf("rays %.4f ± %.4f streams, engine %.4f ± %.4f", mean, se, r.EffectiveStreams, r.StreamsError)
			}
			for i := range power {
				mean, se := within(power[i], power2[i])
				if want := r.MeanPower[i%nf][i/nf]; math.Abs(mean-want) > 4.5*se+1e-4 {
					t.Errorf("near port %d far port %d: power %.4f ± %.4f, engine %.4f", i/nf, i%nf, mean, se, want)
				}
			}
		})
	}
}

// TestCovarianceAgainstDraws: R_V and R_H of ports on bodies that are askew each in its own way, against plain draws of
// directions.
func TestCovarianceAgainstDraws(t *testing.T) {
	a, b := panel(0, 0), panel(0.06, 0.02)
	a.Azimuth, a.Tilt, a.Skew = 25*degree, -6*degree, 35*degree
	b.Azimuth, b.Tilt, b.Skew = -15*degree, 9*degree, -50*degree
	b.Ports = []antenna.Port{{Slant: 20 * degree, Axial: 0.6, Hand: antenna.Left}, {Slant: -70 * degree, Leak: 0.2}}
	near := []antenna.Body{a, b}
	around := scatter.Surroundings{XPR: 2, Near: scatter.Angular{AzimuthSpread: 35 * degree, ElevationSpread: 8 * degree, AzimuthMean: 10 * degree}, Far: scatter.Angular{AzimuthSpread: 5 * degree, ElevationSpread: 2 * degree}}
	s := link(around, 20)
	e, err := New(s, near, []antenna.Body{omni(0, 0, 0)})
	if err != nil {
		t.Fatal(err)
	}
	d := e.Detail(near, []antenna.Body{omni(0, 0, 0)})
	m := &rays{s: s, random: rand.New(rand.NewPCG(7, 8))}
	const draws = 200000
	var v, h, vv, hh [16]complex128
	for range draws {
		dir := m.direction(&around.Near)
		fv, fh := fieldsAt(near, &dir, 2*math.Pi/lambda)
		for i := range 4 {
			for j := range 4 {
				x, y := fv[i]*conj(fv[j]), fh[i]*conj(fh[j])
				v[i*4+j] += x / draws
				h[i*4+j] += y / draws
				vv[i*4+j] += complex(abs2(x)/draws, 0)
				hh[i*4+j] += complex(abs2(y)/draws, 0)
			}
		}
	}
	for i := range v {
		if off, se := cmplx.Abs(v[i]-d.NearV[i]), math.Sqrt(real(vv[i])/draws); off > 4*se+2e-5 {
			t.Errorf("V %d %d: drawn %v ± %v, integrated %v", i/4, i%4, v[i], se, d.NearV[i])
		}
		if off, se := cmplx.Abs(h[i]-d.NearH[i]), math.Sqrt(real(hh[i])/draws); off > 4*se+2e-5 {
			t.Errorf("H %d %d: drawn %v ± %v, integrated %v", i/4, i%4, h[i], se, d.NearH[i])
		}
	}
}

func TestStandardErrorHoldsThePlans(t *testing.T) {
	near, far := row(2, 0.5)
	e, err := New(link(class(scatter.UrbanMicro, false), 25), near, far)
	if err != nil {
		t.Fatal(err)
	}
	p, r := e.Planned(), e.Evaluate(near, far)
	if math.Abs(p.BitsPerSHz-r.BitsPerSHz) > 1e-9 || r.StandardError < 0.999*p.StandardError || p.StandardError > 0.01 || p.StandardError == 0 {
		t.Errorf("the plan, compared with itself: %v ± %v, first %v ± %v", r.BitsPerSHz, r.StandardError, p.BitsPerSHz, p.StandardError)
	}
}

// TestYardstick: COMPUTED by testdata/yardstick/yardstick.py, the same mounts written anew in numpy 1.24.2 and scipy 1.10.1
// with plain quadrature and plain Monte Carlo (60,000 and 76,000 draws); powers by midpoint sums of 6,000 × 24,000
// directions. The pattern's kinks leave both quadratures an error of 1e-5.
func TestYardstick(t *testing.T) {
	for _, c := range []struct {
		name                  string
		around                scatter.Surroundings
		bits, error, streams  float64
		power, correlationFar float64
	}{
		{"RMa with sight", class(scatter.RuralMacro, true), 28.145, 0.0085, 3.753, 0.509805, 0.000042},
		{"UMi without", class(scatter.UrbanMicro, false), 22.891, 0.0084, 3.728, 0.226575, 0.000245},
	} {
		near, far := row(2, 0.5)
		e, err := New(link(c.around, 25), near, far)
		if err != nil {
			t.Fatal(err)
		}
		r, d := e.Planned(), e.Detail(near, far)
		if math.Abs(r.BitsPerSHz-c.bits) > 4*math.Hypot(r.StandardError, c.error) {
			t.Errorf("%s: %.4f ± %.4f bit/s/Hz, numpy %v ± %v", c.name, r.BitsPerSHz, r.StandardError, c.bits, c.error)
		}
		if math.Abs(r.EffectiveStreams-c.streams) > 4*math.Sqrt2*r.StreamsError+0.001 {
			t.Errorf("%s: %.4f ± %.4f streams, numpy %v", c.name, r.EffectiveStreams, r.StreamsError, c.streams)
		}
		// The slants of ±45° give each port half of what its place receives.
		if got := 2 * real(d.FarV[0]); math.Abs(got-c.power) > 2e-5 {
			t.Errorf("%s: far power %v, numpy %v", c.name, got, c.power)
		}
		if got := 2 * cmplx.Abs(d.FarV[2]); math.Abs(got-c.correlationFar) > 2e-5 {
			t.Errorf("%s: far covariance %v, numpy %v", c.name, got, c.correlationFar)
		}
	}
}

func TestALooserErrorIsKept(t *testing.T) {
	near, far := row(2, 0.5)
	s := link(class(scatter.RuralMacro, true), 25)
	full := planned(t, s, near, far)
	s.StandardError = 0.05
	loose := planned(t, s, near, far)
	if loose.StandardError > 0.05 || loose.StandardError <= full.StandardError || math.Abs(loose.BitsPerSHz-full.BitsPerSHz) > 5*loose.StandardError {
		t.Errorf("%v ± %v, in full %v ± %v", loose.BitsPerSHz, loose.StandardError, full.BitsPerSHz, full.StandardError)
	}
}

func TestSharedPower(t *testing.T) {
	// Shared over N near ports is per chain at ρ/N, and its single pair has all of it.
	one, two := []antenna.Body{omni(0, 0, 0)}, []antenna.Body{omni(0, 0, 0), omni(0.1, 0, 0)}
	for _, c := range []struct{ near, far []antenna.Body }{{one, two}, {two, one}} {
		s := link(class(scatter.UrbanMicro, false), 17)
		s.Power = Shared
		a := planned(t, s, c.near, c.far)
		s.Power, s.SNR = PerChain, s.SNR/float64(len(c.near))
		b := planned(t, s, c.near, c.far)
		if math.Abs(a.BitsPerSHz-b.BitsPerSHz) > 1e-9 {
			t.Errorf("%d near ports: %v and %v", len(c.near), a.BitsPerSHz, b.BitsPerSHz)
		}
		if len(c.near) == 2 && a.SingleChain < b.SingleChain+0.5 {
			t.Errorf("single pair %v with all, %v with half of the power", a.SingleChain, b.SingleChain)
		}
	}
}

// mounts draws a random link.
func mounts(t *rapid.T) (s Setup, near, far []antenna.Body) {
	angle := func(name string, most float64) float64 { return rapid.Float64Range(-most, most).Draw(t, name) * degree }
	bodies := func() []antenna.Body {
		var out []antenna.Body
		for i := range rapid.IntRange(1, 2).Draw(t, "bodies") {
			b := antenna.Body{
				Right: float64(i)*0.3 + rapid.Float64Range(-0.1, 0.1).Draw(t, "right"), Up: rapid.Float64Range(-0.2, 0.2).Draw(t, "up"), Forward: rapid.Float64Range(-0.1, 0.1).Draw(t, "forward"),
				Azimuth: angle("azimuth", 20), Tilt: angle("tilt", 8), Skew: angle("skew", 30),
			}
			switch rapid.IntRange(0, 3).Draw(t, "kind") {
			case 0:
				b.Pattern = &antenna.Pattern{Kind: antenna.Panel, BeamwidthAz: 65 * degree, BeamwidthEl: 10 * degree, FrontToBack: 25, Sidelobe: 18}
			case 1:
				b.Pattern = &antenna.Pattern{Kind: antenna.Omni, BeamwidthEl: 20 * degree, Sidelobe: 15}
			case 2:
				b.Pattern = &antenna.Pattern{Kind: antenna.Dish, BeamwidthAz: 9 * degree, Sidelobe: 20, FrontToBack: 35}
			}
			slant := angle("slant", 90)
			b.Ports = append(b.Ports, antenna.Port{Slant: slant, Leak: rapid.Float64Range(0, 0.1).Draw(t, "leak")})
			if rapid.Bool().Draw(t, "crossed") {
				b.Ports = append(b.Ports, antenna.Port{Slant: slant + 90*degree, Axial: rapid.Float64Range(0, 1).Draw(t, "axial"), Hand: antenna.Right, Up: rapid.SampledFrom([]float64{0, 0.02}).Draw(t, "offset")})
			}
			out = append(out, b)
		}
		return out
	}
	near, far = bodies(), bodies()
	angular := func() scatter.Angular {
		return scatter.Angular{
			AzimuthForm: rapid.SampledFrom([]scatter.Form{scatter.Laplacian, scatter.Gaussian}).Draw(t, "form"), AzimuthSpread: rapid.Float64Range(2, 40).Draw(t, "spread") * degree,
			ElevationSpread: rapid.Float64Range(0.5, 8).Draw(t, "rise") * degree, AzimuthMean: angle("mean", 20),
		}
	}
	s = link(scatter.Surroundings{Sight: true, K: linear(rapid.Float64Range(-10, 15).Draw(t, "K")), XPR: linear(rapid.Float64Range(0, 15).Draw(t, "XPR")), Near: angular(), Far: angular()}, rapid.Float64Range(0, 28).Draw(t, "snr"))
	s.Distance = rapid.Float64Range(100, 5000).Draw(t, "distance")
	s.Elevation = angle("elevation", 5)
	if rapid.Bool().Draw(t, "reflectors") {
		s.Around = scatter.Surroundings{Sight: rapid.Bool().Draw(t, "sight")}
		for range rapid.IntRange(1, 3).Draw(t, "count") {
			s.Around.Reflectors = append(s.Around.Reflectors, scatter.Reflector{
				Right: rapid.Float64Range(5, 60).Draw(t, "r"), Up: rapid.Float64Range(-20, 20).Draw(t, "u"), Forward: rapid.Float64Range(5, 90).Draw(t, "f"), Amplitude: rapid.Float64Range(0.1, 1).Draw(t, "a"),
			})
		}
	}
	return s, near, far
}

func build(t *rapid.T, s Setup, near, far []antenna.Body) Result {
	e, err := New(s, near, far)
	if err != nil {
		t.Fatal(err) // no mount drawn here is one that the engine refuses
	}
	return e.Planned()
}

// same compares what may differ by sampling within six standard errors (each estimated from 16 replicates, a thousand
// comparisons a run: four would fail every other run), and what may not to a few times the tolerance of
// the quadrature. near and far say where each port of a has gone in b; nil is nowhere.
func same(t *rapid.T, a, b Result, near, far []int) { nearly(t, a, b, near, far, 1) }

func nearly(t *rapid.T, a, b Result, near, far []int, looser float64) {
	within := 6*math.Hypot(a.StandardError, b.StandardError) + 1e-6
	if math.Abs(a.BitsPerSHz-b.BitsPerSHz) > within {
		t.Fatalf("rate %v ± %v and %v ± %v", a.BitsPerSHz, a.StandardError, b.BitsPerSHz, b.StandardError)
	}
	if math.Abs(a.EffectiveStreams-b.EffectiveStreams) > 6*math.Hypot(a.StreamsError, b.StreamsError)+1e-6 {
		t.Fatalf("streams %v ± %v and %v ± %v", a.EffectiveStreams, a.StreamsError, b.EffectiveStreams, b.StreamsError)
	}
	if math.Abs(a.SingleChain-b.SingleChain) > looser*1e-4*(1+a.SingleChain) {
		t.Fatalf("single chain %v and %v", a.SingleChain, b.SingleChain)
	}
	if math.Abs(a.NearEnvelope-b.NearEnvelope) > looser*1e-4 || math.Abs(a.FarEnvelope-b.FarEnvelope) > looser*1e-4 {
		t.Fatalf("envelopes %v %v and %v %v", a.NearEnvelope, a.FarEnvelope, b.NearEnvelope, b.FarEnvelope)
	}
	for f := range a.MeanPower {
		for n := range a.MeanPower[f] {
			nf, nn := f, n
			if far != nil {
				nf = far[f]
			}
			if near != nil {
				nn = near[n]
			}
			if x, y := a.MeanPower[f][n], b.MeanPower[nf][nn]; math.Abs(x-y) > looser*3e-5*(1+x) {
				t.Fatalf("power of %d %d: %v and %v", f, n, x, y)
			}
		}
	}
}

func copyBodies(b []antenna.Body) []antenna.Body {
	out := append([]antenna.Body(nil), b...)
	for i := range out {
		out[i].Ports = append([]antenna.Port(nil), out[i].Ports...)
	}
	return out
}

func TestInvariances(t *testing.T) {
	t.Run("mirror both ends", func(t *testing.T) {
		rapid.Check(t, func(t *rapid.T) {
			s, near, far := mounts(t)
			a := build(t, s, near, far)
			flip := func(bodies []antenna.Body) []antenna.Body {
				out := copyBodies(bodies)
				for i := range out {
					b := &out[i]
					b.Right, b.Azimuth, b.Skew = -b.Right, -b.Azimuth, -b.Skew
					for j := range b.Ports {
						p := &b.Ports[j]
						p.Slant, p.Right = -p.Slant, -p.Right
						switch p.Hand {
						case antenna.Right:
							p.Hand = antenna.Left
						case antenna.Left:
							p.Hand = antenna.Right
						}
						// The mirror of a leak of +90° is one of −90°; either is a lawful antenna, and conjugating all fields at
						// once, which changes no power and no rate of a law that is circular, brings it back. Here it is set to 0.
						p.Leak = 0
					}
				}
				return out
			}
			for _, bodies := range [][]antenna.Body{near, far} {
				for i := range bodies {
					for j := range bodies[i].Ports {
						bodies[i].Ports[j].Leak = 0
					}
				}
			}
			a = build(t, s, near, far)
			m := s
			m.Around.Near.AzimuthMean, m.Around.Far.AzimuthMean = -m.Around.Near.AzimuthMean, -m.Around.Far.AzimuthMean
			m.Around.Reflectors = append([]scatter.Reflector(nil), m.Around.Reflectors...)
			for i := range m.Around.Reflectors {
				m.Around.Reflectors[i].Right *= -1
			}
			same(t, a, build(t, m, flip(near), flip(far)), nil, nil)
		})
	})
	t.Run("relabel ports and bodies", func(t *testing.T) {
		rapid.Check(t, func(t *rapid.T) {
			s, near, far := mounts(t)
			a := build(t, s, near, far)
			turn := func(bodies []antenna.Body) (out []antenna.Body, to []int) {
				out = copyBodies(bodies)
				n := 0
				for i := range out {
					n += len(out[i].Ports)
				}
				for i, j := 0, len(out)-1; i < j; i, j = i+1, j-1 {
					out[i], out[j] = out[j], out[i]
				}
				for i := range out {
					p := out[i].Ports
					for i, j := 0, len(p)-1; i < j; i, j = i+1, j-1 {
						p[i], p[j] = p[j], p[i]
					}
				}
				for i := range n { // bodies and ports both reversed: ports as a whole are
					to = append(to, n-1-i)
				}
				return out, to
			}
			n, nt := turn(near)
			f, ft := turn(far)
			same(t, a, build(t, s, n, f), nt, ft)
		})
	})
	t.Run("scale frequency and lengths together", func(t *testing.T) {
		rapid.Check(t, func(t *rapid.T) {
			s, near, far := mounts(t)
			by := rapid.Float64Range(0.2, 5).Draw(t, "by")
			a := build(t, s, near, far)
			grow := func(bodies []antenna.Body) []antenna.Body {
				out := copyBodies(bodies)
				for i := range out {
					b := &out[i]
					b.Right, b.Up, b.Forward = b.Right*by, b.Up*by, b.Forward*by
					for j := range b.Ports {
						p := &b.Ports[j]
						p.Right, p.Up, p.Forward = p.Right*by, p.Up*by, p.Forward*by
					}
				}
				return out
			}
			g := s
			g.Wavelength *= by
			g.Distance *= by
			g.Around.Reflectors = append([]scatter.Reflector(nil), g.Around.Reflectors...)
			for i := range g.Around.Reflectors {
				r := &g.Around.Reflectors[i]
				r.Right, r.Up, r.Forward = r.Right*by, r.Up*by, r.Forward*by
			}
			b := build(t, g, grow(near), grow(far))
			same(t, a, b, nil, nil)
			if a.StandardError > 0 && math.Abs(a.BitsPerSHz-b.BitsPerSHz) > 6*a.StandardError+1e-6 {
				t.Fatalf("%v and %v", a.BitsPerSHz, b.BitsPerSHz)
			}
		})
	})
	t.Run("change the ends over", func(t *testing.T) { // reciprocity: det(I + ρHHᴴ) = det(I + ρHᴴH)
		rapid.Check(t, func(t *rapid.T) {
			s, near, far := mounts(t)
			a := build(t, s, near, far)
			o := s
			o.Elevation = -s.Elevation
			o.Around.Near, o.Around.Far = s.Around.Far, s.Around.Near
			o.Around.Reflectors = append([]scatter.Reflector(nil), s.Around.Reflectors...)
			se, ce := math.Sincos(s.Elevation)
			for i := range o.Around.Reflectors {
				r := &o.Around.Reflectors[i]
				r.Right, r.Up, r.Forward = -r.Right, r.Up-s.Distance*se, s.Distance*ce-r.Forward
			}
			b := build(t, o, far, near)
			back := b
			back.NearEnvelope, back.FarEnvelope = b.FarEnvelope, b.NearEnvelope
			back.MeanPower = nil
			for f := range a.MeanPower {
				var line []float64
				for n := range a.MeanPower[f] {
					line = append(line, b.MeanPower[n][f])
				}
				back.MeanPower = append(back.MeanPower, line)
			}
			same(t, a, back, nil, nil)
		})
	})
	t.Run("rotate both ends together about the path", func(t *testing.T) {
		// A rigid turn about the line of sight, for level bodies that look along it: skews and positions turn, clockwise here
		// and, as seen from behind the other end, counter-clockwise there. Scatter has an up and a down, sight has not.
		rapid.Check(t, func(t *rapid.T) {
			s, near, far := mounts(t)
			s.Elevation = 0
			s.Around = scatter.Surroundings{Sight: true, K: math.Inf(1)}
			by := rapid.Float64Range(-math.Pi, math.Pi).Draw(t, "by")
			level := func(bodies []antenna.Body, by float64) []antenna.Body {
				out := copyBodies(bodies)
				for i := range out {
					b := &out[i]
					b.Azimuth, b.Tilt = 0, 0
					sn, cs := math.Sincos(by)
					b.Skew += by
					b.Right, b.Up = b.Right*cs+b.Up*sn, b.Up*cs-b.Right*sn
				}
				return out
			}
			same(t, build(t, s, level(near, 0), level(far, 0)), build(t, s, level(near, by), level(far, -by)), nil, nil)
		})
	})
	t.Run("mix an orthogonal pair", func(t *testing.T) {
		// A radio that combines sees ±45° as it sees horizontal and vertical; the single pair does not.
		rapid.Check(t, func(t *rapid.T) {
			s, near, far := mounts(t)
			for i := range near {
				near[i].Ports = []antenna.Port{{Slant: 0.3}, {Slant: 0.3 + math.Pi/2}}
			}
			a := build(t, s, near, far)
			other := copyBodies(near)
			by := rapid.Float64Range(-3, 3).Draw(t, "by")
			for i := range other {
				other[i].Ports = []antenna.Port{{Slant: by}, {Slant: by + math.Pi/2}}
			}
			b := build(t, s, other, far)
			if math.Abs(a.BitsPerSHz-b.BitsPerSHz) > 6*math.Hypot(a.StandardError, b.StandardError)+1e-6 || math.Abs(a.EffectiveStreams-b.EffectiveStreams) > 6*math.Hypot(a.StreamsError, b.StreamsError)+1e-6 {
				t.Fatalf("%v and %v", a, b)
			}
		})
	})
}

// TestEvaluateAgainstNew: the plan as control changes how well a mount is known, not what it carries. The quadrature is
// chosen for the plan; 17° off it, with a lobe of 9°, it holds 0.2 % of the power.
func TestEvaluateAgainstNew(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		s, near, far := mounts(t)
		e, err := New(s, near, far)
		if err != nil {
			t.Fatal(err)
		}
		moved := copyBodies(near)
		for i := range moved {
			moved[i].Skew += rapid.Float64Range(-0.3, 0.3).Draw(t, "turn")
			moved[i].Azimuth += rapid.Float64Range(-0.2, 0.2).Draw(t, "swing")
			if i > 0 {
				moved[i].Right += rapid.Float64Range(-0.05, 0.05).Draw(t, "push")
			}
		}
		r := e.Evaluate(moved, far)
		if r.StandardError > 0.0101 {
			t.Fatalf("standard error %v", r.StandardError)
		}
		nearly(t, build(t, s, moved, far), r, nil, nil, 60)
	})
}

// TestLocalAgainstEvaluate: common random numbers and a coarse quadrature keep the difference to the anchor. What is left
// must be small against the difference itself, or against what a limit would notice.
func TestLocalAgainstEvaluate(t *testing.T) {
	random := rand.New(rand.NewPCG(3, 4))
	for name, around := range map[string]scatter.Surroundings{"RMa": class(scatter.RuralMacro, true), "UMi": class(scatter.UrbanMicro, false)} {
		for _, n := range []int{1, 2} {
			near, far := row(n, 0.5)
			e, err := New(link(around, 25), near, far)
			if err != nil {
				t.Fatal(err)
			}
			near[0].Skew, near[0].Tilt = 5*degree, 2*degree
			l := e.Around(near, far)
			anchor := l.Anchor()
			if got := l.Evaluate(near, far); math.Abs(got.NearEnvelope-anchor.NearEnvelope) > 1e-12 || math.Abs(got.FarEnvelope-anchor.FarEnvelope) > 1e-12 || math.Abs(got.MeanPower[0][0]/anchor.MeanPower[0][0]-1) > 1e-12 || math.Abs(got.RateMultiple/anchor.RateMultiple-1) > 1e-9 {
				t.Errorf("%s %d: the anchor itself is %+v, want %+v", name, n, got, anchor)
			} else if math.Abs(got.BitsPerSHz-anchor.BitsPerSHz) > 1e-9 || math.Abs(got.EffectiveStreams-anchor.EffectiveStreams) > 1e-9 {
				t.Errorf("%s %d: the anchor itself is %v, want %v", name, n, got.BitsPerSHz, anchor.BitsPerSHz)
			}
			var change, left, streams float64
			const draws = 25
			for range draws {
				a, b := copyBodies(near), copyBodies(far)
				for _, bodies := range [][]antenna.Body{a, b} {
					for i := range bodies {
						bodies[i].Skew += 2 * degree * random.NormFloat64()
						bodies[i].Tilt += 1 * degree * random.NormFloat64()
						bodies[i].Azimuth += 2 * degree * random.NormFloat64()
						if i > 0 {
							bodies[i].Right += 0.003 * random.NormFloat64()
							bodies[i].Up += 0.003 * random.NormFloat64()
						}
					}
				}
				full, quick := e.Evaluate(a, b), l.Evaluate(a, b)
				change += math.Pow(full.BitsPerSHz-anchor.BitsPerSHz, 2) / draws
				left += math.Pow(full.BitsPerSHz-quick.BitsPerSHz, 2) / draws
				streams += math.Pow(full.EffectiveStreams-quick.EffectiveStreams, 2) / draws
			}
			change, left, streams = math.Sqrt(change), math.Sqrt(left), math.Sqrt(streams)
			if change < 0.2 {
				t.Errorf("%s %d: the draws move nothing (%.4f): this test sees nothing", name, n, change)
			}
			if left > 0.1*change || streams > 0.02 {
				t.Errorf("%s, %d bodies: rate %.4f of a change of %.4f left, streams %.4f", name, n, left, change, streams)
			}
		}
	}
}

func TestStreamsAndBeams(t *testing.T) {
	t.Run("one stream in bare sight points at the other end", func(t *testing.T) {
		two := []antenna.Body{omni(0, 0, 0), omni(lambda/2, 0, 0)}
		e, err := New(sightOnly(20), two, two)
		if err != nil {
			t.Fatal(err)
		}
		az := []float64{-90 * degree, -30 * degree, 0, 30 * degree}
		s, err := e.Streams(two, two, true, az)
		if err != nil {
			t.Fatal(err)
		}
		if len(s) != 2 || math.Abs(s[0].Share-1) > 1e-3 || math.Abs(s[0].Gain-4) > 1e-3 {
			t.Fatalf("%+v", s)
		}
		// Two equal elements half a wavelength apart: 2 cos²(½π sin φ): 3 dB ahead, 0 dB at 30°, nothing endfire.
		for i, want := range []float64{-100, 0, 3.0103, 0} {
			if i == 0 && s[0].Beam[0] < -30 {
				continue
			}
			if math.Abs(s[0].Beam[i]-want) > 0.01 {
				t.Errorf("beam at %v°: %v dB, want %v", az[i]/degree, s[0].Beam[i], want)
			}
		}
	})
	t.Run("weights maximise what arrives", func(t *testing.T) {
		rapid.Check(t, func(t *rapid.T) {
			s, near, far := mounts(t)
			e, err := New(s, near, far)
			if err != nil {
				t.Fatal(err)
			}
			for _, end := range []bool{true, false} {
				list, err := e.Streams(near, far, end, nil)
				if err != nil {
					t.Fatal(err)
				}
				total, power := 0.0, 0.0
				for _, x := range list {
					total += x.Share
				}
				for _, line := range e.Planned().MeanPower {
					for _, p := range line {
						power += p
					}
				}
				n := 0.0
				for _, w := range list[0].Weights {
					n += abs2(w)
				}
				if math.Abs(n-1) > 1e-9 || total > 1+1e-9 {
					t.Fatalf("norm %v, shares %v", n, total)
				}
				// No weighting beats all ports together, and none of the best port alone beats the best weighting.
				best := 0.0
				for i := range list[0].Weights {
					sum := 0.0
					for j := range e.Planned().MeanPower {
						if end {
							sum += e.Planned().MeanPower[j][i]
						}
					}
					if !end {
						for _, p := range e.Planned().MeanPower[i] {
							sum += p
						}
					}
					best = math.Max(best, sum)
				}
				if list[0].Gain < best*(1-1e-4) || list[0].Gain > power*(1+1e-4) {
					t.Fatalf("gain %v, best port %v, all %v", list[0].Gain, best, power)
				}
			}
		})
	})
	t.Run("both polarizations of a beam add in power", func(t *testing.T) {
		slanted := []antenna.Body{omni(0, 0, 0)}
		slanted[0].Ports = []antenna.Port{{Slant: 45 * degree}}
		facing := []antenna.Body{omni(0, 0, 0)}
		facing[0].Ports = []antenna.Port{{Slant: -45 * degree}}
		e, err := New(sightOnly(20), slanted, facing)
		if err != nil {
			t.Fatal(err)
		}
		if s, err := e.Streams(slanted, facing, true, []float64{0, 1}); err != nil || math.Abs(s[0].Beam[0])+math.Abs(s[0].Beam[1]) > 1e-6 {
			t.Errorf("%+v %v", s, err)
		}
	})
	e, err := New(sightOnly(20), []antenna.Body{omni(0, 0, 0)}, []antenna.Body{omni(0, 0, 0)})
	if err != nil {
		t.Fatal(err)
	}
	if _, err := e.Streams(nil, nil, true, nil); err == nil {
		t.Error("another number of bodies accepted")
	}
}

func TestDipolesCouple(t *testing.T) {
	dipole := func(r float64) antenna.Body {
		return antenna.Body{Pattern: &antenna.Pattern{Kind: antenna.Dipole}, Right: r, Ports: make([]antenna.Port, 1)}
	}
	around := scatter.Surroundings{XPR: math.Inf(1), Near: scatter.Angular{AzimuthForm: scatter.Uniform}, Far: scatter.Angular{AzimuthForm: scatter.Uniform}}
	s := link(around, 20)
	for _, d := range []float64{0.15, 0.3, 0.5, 3} {
		near := []antenna.Body{dipole(0), dipole(d * lambda)}
		e, err := New(s, near, []antenna.Body{dipole(0)})
		if err != nil {
			t.Fatal(err)
		}
		if n, f := e.Coupled(); !n || f {
			t.Fatalf("coupled %v %v", n, f)
		}
		r := e.Planned()
		// By hand, horizontal arrivals all round: R = [[1, J₀], [J₀, 1]], C R Cᴴ with C = (2R₁₁)(Z + Z₁₁*)⁻¹.
		c := make([]complex128, 4)
		antenna.CouplingMatrix(c, [][3]float64{{}, {d, 0, 0}})
		j := complex(math.J0(2*math.Pi*d), 0)
		own := abs2(c[0]) + abs2(c[1]) + 2*real(c[0]*conj(c[1])*j)
		both := c[0]*conj(c[2]) + c[1]*conj(c[3]) + (c[0]*conj(c[3])+c[1]*conj(c[2]))*j
		if got := r.MeanPower[0][0]; math.Abs(got-own) > 2e-4 {
			t.Errorf("%v wavelengths: power %v, want %v", d, got, own)
		}
		if want := abs2(both) / own / own; math.Abs(r.NearEnvelope-want) > 2e-4 {
			t.Errorf("%v wavelengths: envelope %v, want %v", d, r.NearEnvelope, want)
		}
		if d < 0.2 && (own > 0.9 || r.NearEnvelope > math.Pow(math.J0(2*math.Pi*d), 2)) {
			// Close dipoles lose power to each other's loads and decorrelate by it (Clerckx et al. 2007; common practice).
			t.Errorf("%v wavelengths: power %v, envelope %v", d, own, r.NearEnvelope)
		}
	}
	// Through the direct path as well: C_far H C_nearᵀ, checked by reciprocity and by the far ends' gain.
	near, far := []antenna.Body{dipole(0), dipole(0.3 * lambda)}, []antenna.Body{dipole(0)}
	r := planned(t, sightOnly(20), near, far)
	c := make([]complex128, 4)
	antenna.CouplingMatrix(c, [][3]float64{{}, {0.3, 0, 0}})
	if want := abs2(c[0] + c[1]); math.Abs(r.MeanPower[0][0]-want) > 1e-4 {
		t.Errorf("direct path: %v, want %v", r.MeanPower[0][0], want)
	}
	lean := []antenna.Body{dipole(0), dipole(0.3 * lambda)}
	lean[1].Skew = 30 * degree
	e, err := New(s, lean, far)
	if err != nil {
		t.Fatal(err)
	}
	if n, _ := e.Coupled(); n {
		t.Error("dipoles 30° apart are outside the model")
	}
}

func TestNewRefuses(t *testing.T) {
	near, far := row(2, 0.5)
	good := link(class(scatter.RuralMacro, true), 20)
	for name, change := range map[string]func(s *Setup, near, far *[]antenna.Body){
		"no wavelength":          func(s *Setup, _, _ *[]antenna.Body) { s.Wavelength = 0 },
		"distance not a number":  func(s *Setup, _, _ *[]antenna.Body) { s.Distance = math.NaN() },
		"endless power":          func(s *Setup, _, _ *[]antenna.Body) { s.SNR = math.Inf(1) },
		"straight up":            func(s *Setup, _, _ *[]antenna.Body) { s.Elevation = math.Pi / 2 },
		"no ports":               func(_ *Setup, n, _ *[]antenna.Body) { *n = nil },
		"too many ports":         func(_ *Setup, n, _ *[]antenna.Body) { *n, _ = row(9, 0.5) },
		"two in one place":       func(_ *Setup, n, _ *[]antenna.Body) { *n, _ = row(2, 0) },
		"a pattern of nothing":   func(_ *Setup, n, _ *[]antenna.Body) { (*n)[0].Pattern = &antenna.Pattern{Kind: antenna.Panel} },
		"no cross-polar ratio":   func(s *Setup, _, _ *[]antenna.Body) { s.Around.XPR = 0 },
		"a negative K":           func(s *Setup, _, _ *[]antenna.Body) { s.Around.K = -1 },
		"mounts that touch":      func(s *Setup, _, _ *[]antenna.Body) { s.Distance = 0.6 },
		"a reflector at the far": func(s *Setup, _, _ *[]antenna.Body) { s.Around.Reflectors = []scatter.Reflector{{Forward: 1900}} },
		"a reflector here":       func(s *Setup, _, _ *[]antenna.Body) { s.Around.Reflectors = []scatter.Reflector{{Right: 0.1}} },
	} {
		s, n, f := good, copyBodies(near), copyBodies(far)
		change(&s, &n, &f)
		if _, err := New(s, n, f); err == nil {
			t.Errorf("%s: accepted", name)
		}
	}
	if _, err := New(good, near, far); err != nil {
		t.Error(err)
	}
	for name, m := range map[string][]complex128{
		"not square": {1, 2, 3}, "empty": {}, "not Hermitian": {1, 0.5, 0.4, 1}, "diagonal": {1, 0, 0, 2},
		"not definite": {1, 0.9, -0.9, 0.9, 1, 0.9, -0.9, 0.9, 1}, "not a number": {1, complex(math.NaN(), 0), 0, 1},
	} {
		if CheckCorrelation(m) == nil {
			t.Errorf("%s: accepted", name)
		}
	}
	if _, err := Kronecker(identity(2), identity(2), 0, PerChain); err == nil {
		t.Error("no power accepted")
	}
	e, err := New(good, near, far)
	if err != nil {
		t.Fatal(err)
	}
	defer func() {
		if recover() == nil {
			t.Error("another number of bodies did not panic")
		}
	}()
	e.Evaluate(near[:1], far)
}

// TestApart: what is left out as uncorrelated is indeed next to nothing, and what can not be resolved is refused.
func TestApart(t *testing.T) {
	// At the edge of the rule: q = kdσ = 40.
	sigma := 20 * degree
	d := decorrelated / (2 * math.Pi * sigma)
	for kind, most := range map[scatter.SpectrumKind]float64{scatter.SpectrumLaplacian: 3e-3, scatter.SpectrumGaussian: 1e-4} {
		if got := cmplx.Abs(scatter.Correlation(scatter.Spectrum{Kind: kind, SpreadRad: sigma}, d, 0)); got > most {
			t.Errorf("%v: correlation %v left, want at most %v", kind, got, most)
		}
	}
	iso := func(r, u, f float64) antenna.Body {
		return antenna.Body{Right: r, Up: u, Forward: f, Ports: make([]antenna.Port, 1)}
	}
	spread := scatter.Angular{AzimuthSpread: sigma, ElevationSpread: 3 * degree}
	s := link(scatter.Surroundings{XPR: linear(9), Near: spread, Far: spread}, 20)
	// Just within and just beyond: no step that a limit would notice.
	var before Result
	for i, share := range []float64{0.999, 1.001} {
		two := []antenna.Body{iso(0, 0, 0), iso(share*d*lambda, 0, 0)}
		r := planned(t, s, two, two)
		if i == 1 && (math.Abs(r.BitsPerSHz-before.BitsPerSHz) > 0.03 || r.NearEnvelope != 0 || before.NearEnvelope > 1e-5) {
			t.Errorf("a step: %+v, %+v", before, r)
		}
		before = r
	}
	// Side by side by ten thousand wavelengths costs nothing; one behind the other can not be resolved.
	wide := []antenna.Body{iso(0, 0, 0), iso(1e4*lambda, 0, 0)}
	if _, err := New(s, wide, wide); err != nil {
		t.Error(err)
	}
	deep := []antenna.Body{iso(0, 0, 0), iso(0, 0, 1e4*lambda)}
	if _, err := New(s, deep, wide); err == nil {
		t.Error("ten thousand wavelengths of depth accepted")
	}
}
