package stream

import (
	"errors"
	"math"
	"slices"

	"crossplumb/calc/antenna"
	"crossplumb/calc/scatter"
)

// Power says what the signal-to-noise ratio ρ of a Setup is the power of.
type Power int

const (
	// PerChain: every chain sends with ρ; log₂ det(I + ρHHᴴ).
	PerChain Power = iota
	// Shared: the sending chains share ρ; log₂ det(I + (ρ/N)HHᴴ), N the number of near ports.
	Shared
)

// Setup is all of a link that does not hang on bolts. SI and radians.
type Setup struct {
	Wavelength float64 // m
	Distance   float64 // m, from datum to datum along the straight line
	Elevation  float64 // rad, of the far datum seen from the near one; the near one is seen from there at −Elevation
	SNR        float64 // ρ, linear: one chain over the noise of one receiver for the planned, aligned, co-polar port pair in free space
	Power      Power
	Around     scatter.Surroundings

	// StandardError is what BitsPerSHz may err by; 0 asks for the full 0.01 bit/s/Hz. More is enough where only
	// differences and ratios between geometries count, which common random numbers keep: 0.03 takes a tenth of the time.
	StandardError float64
}

// Result is what one mount, facing another, carries. Every mean is over the scatter.
type Result struct {
	BitsPerSHz    float64 // E log₂ det
	StandardError float64 // of BitsPerSHz, from independent randomisations; 0 where nothing is random

	EffectiveStreams float64 // E Σ ρ'λ/(1+ρ'λ), λ the eigenvalues of HHᴴ, ρ' = ρ or ρ/N (degrees of freedom, Shiu et al. 2000)
	StreamsError     float64 // standard error of EffectiveStreams
	SingleChain      float64 // C₁: E log₂(1 + ρ|h|²) of the best single port pair, bit/s/Hz; with shared power it has all of it
	BestPair         [2]int  // its near and far port, counted through the bodies in order
	RateMultiple     float64 // BitsPerSHz / SingleChain (array gain is in it, so it may pass the number of ports); 0 where no pair receives

	// NearEnvelope and FarEnvelope are the largest |ρ|² of the scattered part between like-polarized ports in different
	// places, the other end's ports exciting equally; −1 where an end has no such pair or nothing is scattered. They
	// speak for a mean of zero: not to be judged for K ≥ 10 dB.
	NearEnvelope, FarEnvelope float64

	// MeanPower[f][n] is E|h|² from near port n to far port f, 1 being the planned, aligned, co-polar pair in free space.
	MeanPower [][]float64

	// NearPointing and FarPointing are, per body, how far the pattern toward the other end lies below the top of its main
	// lobe, in dB, 0 or more.
	NearPointing, FarPointing []float64
}

// Targets of the standard error of BitsPerSHz. The limit is 0.01; the estimate from 16 replicates is itself 18 % uncertain
// and sampling stops when it first falls below the target, so that the target stands below.
const (
	standardErrorTarget = 0.0085
	kroneckerTarget     = 0.004
	evaluateSlack       = 1.15 // what a compared geometry may add to the plan's own
	firstPoints         = 64   // per replicate
	mostPoints          = 4096 // per replicate: 32,768 in all
)

// leastBeam is the share of the direct path below which its singular vectors are not followed: their directions carry the
// rounding of phases, kD·2⁻⁵³ of a radian or 1e-9, over the share, and the answer must be the same on every machine.
const leastBeam = 1e-5

// Tolerances of each covariance against the power received. A covariance error of 1e-5 moves the rate of the weakest
// eigenmode above the noise by about 1e-5·ρ, 0.003 bit/s/Hz at 25 dB; Local compares two like errors and keeps their
// difference only.
const (
	fineTolerance   = 1e-5
	coarseTolerance = 1e-2
)

// Engine evaluates geometries of one pair of mounts under one setup. It keeps scratch space: one goroutine at a time.
type Engine struct {
	setup     Setup
	near, far *mount
	rho       float64 // ρ' of the determinant
	target    float64 // of the standard error
	same      float64 // κ same
	cross     float64 // κ cross
	los       float64 // √(K/(1+K)), 0 without sight
	scattered float64 // 1/(1+K)

	fineNear, fineFar     *spectrum
	coarseNear, coarseFar *spectrum

	points   *points
	channel  *channel
	ranked   bool
	u, v     []complex128 // by columns: Uᴴ H V is what is sampled
	likeNear [][2]int
	likeFar  [][2]int

	anchor   Result
	base     samples // of the anchor
	baseBits float64 // their mean over all points
	baseDoF  float64
}

// New prepares an engine for the mounts as planned: it reads patterns and ports from there, chooses the quadratures and
// the random points, and evaluates the plan once. The error says what in the setup cannot be computed with.
func New(setup Setup, near, far []antenna.Body) (*Engine, error) {
	e, err := prepare(setup, near, far)
	if err != nil {
		return nil, err
	}
	e.anchorAt(near, far)
	return e, nil
}

var (
	errSetup = errors.New("wavelength, distance and signal-to-noise ratio must be above 0 and finite, the elevation within 90 degrees")
	errPorts = errors.New("each end needs 1 to 16 ports")
	errXPR   = errors.New("the cross-polar ratio must be above 0")
	errPlace = errors.New("two elements of like polarization are planned in one place")
	errK     = errors.New("the Ricean factor must not be negative")
	errWide  = errors.New("the antennas of one end stand so deep behind each other, in wavelengths, that scatter between them is not modelled; bring them nearer to one plane or describe the surroundings by reflectors")
	errFar   = errors.New("the ends are nearer to each other than the mounts are wide")
	errMirr  = errors.New("a reflector stands on one of the mounts")
)

func prepare(setup Setup, near, far []antenna.Body) (*Engine, error) {
	positive := func(x float64) bool { return x > 0 && !math.IsInf(x, 1) }
	if !positive(setup.Wavelength) || !positive(setup.Distance) || !positive(setup.SNR) || !(math.Abs(setup.Elevation) < math.Pi/2) {
		return nil, errSetup
	}
	e := &Engine{setup: setup, near: newMount(near, setup.Wavelength), far: newMount(far, setup.Wavelength)}
	nn, nf := len(e.near.ports), len(e.far.ports)
	if nn < 1 || nf < 1 || nn > maxPorts || nf > maxPorts {
		return nil, errPorts
	}
	for _, bodies := range [][]antenna.Body{near, far} {
		for i := range bodies {
			if p := bodies[i].Pattern; p != nil {
				if err := p.Check(); err != nil {
					return nil, err
				}
			}
		}
	}
	var err error
	if e.likeNear, err = e.near.like(); err != nil {
		return nil, err
	}
	if e.likeFar, err = e.far.like(); err != nil {
		return nil, err
	}
	if e.near.extent()+e.far.extent() >= setup.Distance {
		return nil, errFar
	}
	e.rho, e.target = setup.SNR, standardErrorTarget
	if setup.StandardError > 0 {
		e.target = setup.StandardError * standardErrorTarget / 0.01
	}
	if setup.Power == Shared {
		e.rho /= float64(nn)
	}
	a := &setup.Around
	e.scattered = 1
	if len(a.Reflectors) > 0 {
		if a.Sight {
			e.los = 1
		}
		for i := range a.Reflectors {
			r := &a.Reflectors[i]
			if !(math.Hypot(math.Hypot(r.Right, r.Up), r.Forward) > e.near.extent()) || !e.clear(r) || !(r.Amplitude >= 0) {
				return nil, errMirr
			}
		}
		e.channel = newChannel(nf, nn, 2*len(a.Reflectors))
	} else {
		k := 0.0
		if a.Sight {
			k = a.K
		}
		if !(k >= 0) {
			return nil, errK
		}
		if math.IsInf(k, 1) {
			e.los, e.scattered = 1, 0
		} else {
			e.los, e.scattered = math.Sqrt(k/(1+k)), 1/(1+k)
		}
		e.channel = newChannel(nf, nn, 0)
		if e.scattered > 0 {
			if !(a.XPR > 0) {
				return nil, errXPR
			}
			e.same, e.cross = 1, 0
			if !math.IsInf(a.XPR, 1) {
				e.same, e.cross = a.XPR/(1+a.XPR), 1/(1+a.XPR)
			}
			if !e.near.resolvable(&a.Near) || !e.far.resolvable(&a.Far) {
				return nil, errWide
			}
		}
	}
	return e, nil
}

// clear reports whether a reflector stands off the far mount.
func (e *Engine) clear(r *scatter.Reflector) bool {
	se, ce := math.Sincos(e.setup.Elevation)
	d := e.setup.Distance
	u, f := r.Up-d*se, r.Forward-d*ce
	return math.Sqrt(r.Right*r.Right+u*u+f*f) > e.far.extent()
}

// extent is how far the outermost element stands from the datum.
func (m *mount) extent() float64 {
	most := 0.0
	for i := range m.ports {
		r, u, f := m.bodies[m.ports[i].body].PortPosition(m.ports[i].local)
		most = math.Max(most, math.Sqrt(r*r+u*u+f*f))
	}
	return most
}

// like lists the pairs of ports of one polarization in different places. Two in one place are one antenna counted twice:
// an error.
func (m *mount) like() ([][2]int, error) {
	var out [][2]int
	for i := range m.ports {
		for j := range i {
			a, b := &m.ports[i], &m.ports[j]
			dot := conj(a.v)*b.v + conj(a.h)*b.h
			own := (abs2(a.v) + abs2(a.h)) * (abs2(b.v) + abs2(b.h))
			if abs2(dot) < 0.97*own { // 10° apart at most, as two bodies' labels may be typed
				continue
			}
			if a.unit == b.unit {
				return nil, errPlace
			}
			ar, au, af := m.bodies[a.body].PortPosition(a.local)
			br, bu, bf := m.bodies[b.body].PortPosition(b.local)
			if ar == br && au == bu && af == bf {
				return nil, errPlace
			}
			out = append(out, [2]int{j, i})
		}
	}
	return out, nil
}

// load brings the channel's law to a geometry, by the fine or the coarse quadrature.
func (e *Engine) load(near, far []antenna.Body, coarse bool) {
	if len(near) != len(e.near.bodies) || len(far) != len(e.far.bodies) {
		panic("stream: another number of bodies than the engine was built for")
	}
	c := e.channel
	nt, ft := e.near.twins(near), e.far.twins(far)
	clear(c.direct)
	if e.los > 0 {
		e.direct(near, far, e.near.ports, e.far.ports, c.direct)
		e.couple(near, far, c.direct)
		scale(c.direct, e.los)
	}
	if len(c.paths) > 0 {
		copy(c.mean, c.direct)
		e.reflections(near, far, c.paths)
		c.sum()
		return
	}
	if e.near.twin == nil && e.far.twin == nil {
		copy(c.mean, c.direct)
	} else if clear(c.mean); e.los > 0 {
		e.direct(near, far, nt, ft, c.mean)
		e.couple(near, far, c.mean)
		scale(c.mean, e.los)
	}
	if e.scattered == 0 {
		clear(c.power)
		c.random = false
		return
	}
	sn, sf, tolerance := &e.fineNear, &e.fineFar, fineTolerance
	if coarse {
		sn, sf, tolerance = &e.coarseNear, &e.coarseFar, coarseTolerance
	}
	if *sn == nil {
		*sn, *sf = newSpectrum(e.near, &e.setup.Around.Near, tolerance), newSpectrum(e.far, &e.setup.Around.Far, tolerance)
	}
	(*sn).spread(near, nt, c.rv, c.rh, c.trv, c.trh)
	(*sf).spread(far, ft, c.sv, c.sh, c.tsv, c.tsh)
	c.powers(e.scattered, e.same, e.cross)
	if !e.ranked && c.random {
		// Beams of the plan's direct path: strong and weak streams apart. No rate depends on it.
		if e.los > 0 {
			e.u, _, e.v = svd(c.mean, c.far, c.near, leastBeam)
		}
		e.ranked = true
	}
	if e.u != nil {
		c.turned(e.u, e.v)
	}
	c.factor(e.scattered, e.same, e.cross)
}

func scale(h []complex128, by float64) {
	if by == 1 {
		return
	}
	for i := range h {
		h[i] *= complex(by, 0)
	}
}

// spread brings the covariances of ports and twins to where the bodies hang.
func (s *spectrum) spread(bodies []antenna.Body, twins []port, rv, rh, tv, th []complex128) {
	s.update(bodies)
	s.covariance(s.m.ports, rv, rh)
	if s.m.dipole {
		c := s.m.coupling(bodies)
		sandwich(rv, c, len(s.m.ports))
		sandwich(rh, c, len(s.m.ports))
	}
	if s.m.twin == nil {
		copy(tv, rv)
		copy(th, rh)
		return
	}
	s.covariance(twins, tv, th)
}

// samples are rate and effective streams at each random point, replicate by replicate.
type samples struct {
	n             int // per replicate
	bits, streams [replicates][]float64
}

// extend evaluates the loaded channel on points s.n to n of each replicate.
func (e *Engine) extend(s *samples, n int) {
	e.points.upTo(n, nil)
	size := e.points.rows * e.points.cols
	for r := range replicates {
		for _, b := range e.points.draws[r] {
			for i := max(s.n, b.from); i < min(n, b.to); i++ {
				e.channel.at(b.w[(i-b.from)*size:][:size])
				e.sample(s, r)
			}
		}
	}
	s.n = n
}

// grow is extend for the reference of triangular draws itself: new points come with their H.
func (e *Engine) grow(s *samples, n int) {
	if e.points.reference == nil || s.n != e.points.have {
		e.extend(s, n)
		return
	}
	e.points.upTo(n, func(r int, h []complex128) {
		copy(e.channel.h, h)
		e.sample(s, r)
	})
	s.n = n
}

func (e *Engine) sample(s *samples, r int) {
	b, d := e.channel.rate(e.rho)
	s.bits[r] = append(s.bits[r], b)
	s.streams[r] = append(s.streams[r], d)
}

func mean(x []float64) float64 {
	s := 0.0
	for _, v := range x {
		s += v
	}
	return s / float64(len(x))
}

// overReplicates is the mean of the replicates' means and its standard error.
func overReplicates(x *[replicates][]float64) (m, se float64) {
	var means [replicates]float64
	for r := range x {
		means[r] = mean(x[r])
	}
	return meanAndError(&means)
}

func meanAndError(means *[replicates]float64) (m, se float64) {
	m = mean(means[:])
	for _, v := range means {
		se += (v - m) * (v - m)
	}
	return m, math.Sqrt(se / (replicates * (replicates - 1)))
}

// newLayout makes the random points that the channel reads; triangular ones refer to the channel as it is loaded.
func (e *Engine) newLayout(triangular bool) *points {
	c := e.channel
	if n := len(c.paths); n > 0 {
		return newPoints(n, 1, true, nil)
	}
	if !triangular {
		return newPoints(c.far, c.near, false, nil)
	}
	reference := &channel{far: c.far, near: c.near, mean: slices.Clone(c.mean), lower: slices.Clone(c.lower)}
	reference.sparse()
	return newPoints(c.far, c.near, false, reference)
}

// anchorAt evaluates the plan to full accuracy and keeps its samples, to which later geometries are compared.
func (e *Engine) anchorAt(near, far []antenna.Body) {
	e.load(near, far, false)
	e.anchor = e.describe(near, far, true)
	e.settle()
}

// settle samples the loaded channel until its rate is known, and keeps the samples.
func (e *Engine) settle() {
	if !e.channel.random {
		e.channel.hold()
		e.anchor.BitsPerSHz, e.anchor.EffectiveStreams = e.channel.rate(e.rho)
		e.points = e.newLayout(false)
		e.finish(&e.anchor)
		return
	}
	// Near line of sight plain draws do best, in rich scatter triangular ones: a trial tells.
	e.points = e.newLayout(false)
	var s samples
	e.extend(&s, firstPoints)
	m, se := overReplicates(&s.bits)
	if se > e.target && len(e.channel.paths) == 0 && min(e.channel.far, e.channel.near) > 1 {
		plain := e.points
		e.points = e.newLayout(true)
		var t samples
		e.grow(&t, firstPoints)
		if tm, tse := overReplicates(&t.bits); tse < 0.8*se {
			s, m, se = t, tm, tse
		} else {
			e.points = plain
		}
	}
	for se > e.target && s.n < mostPoints {
		e.grow(&s, more(s.n, se/e.target))
		m, se = overReplicates(&s.bits)
	}
	e.base, e.baseBits = s, m
	e.anchor.BitsPerSHz, e.anchor.StandardError = m, se
	e.baseDoF, e.anchor.StreamsError = overReplicates(&s.streams)
	e.anchor.EffectiveStreams = e.baseDoF
	e.finish(&e.anchor)
}

// more is how many points per replicate to go on with when the error is too large by a factor: as many as plain sampling
// would need, twice as many at most, in whole runs of 64 that keep the sequence even.
func more(n int, factor float64) int {
	want := float64(n) * math.Min(math.Max(factor*factor, 1.125), 2)
	return min((int(want)+63)/64*64, mostPoints)
}

// hold puts the mean into h: the channel where nothing is random.
func (c *channel) hold() { copy(c.h, c.mean) }

func (e *Engine) finish(r *Result) {
	if r.SingleChain > 0 {
		r.RateMultiple = r.BitsPerSHz / r.SingleChain
	}
}

// Planned is the result for the mounts given to New.
func (e *Engine) Planned() Result { return e.anchor }

// Evaluate computes the mounts where they hang, to the accuracy of New. It draws the same points as the plan and uses
// the plan's well-known mean as control: the closer to plan, the fewer points are needed.
//
// Only position, azimuth, tilt and skew are read from near and far; patterns and ports are those of New, and the number
// of bodies must be the same (panics otherwise).
func (e *Engine) Evaluate(near, far []antenna.Body) Result {
	e.load(near, far, false)
	r := e.describe(near, far, true)
	if !e.channel.random {
		e.channel.hold()
		r.BitsPerSHz, r.EffectiveStreams = e.channel.rate(e.rho)
		e.finish(&r)
		return r
	}
	var s samples
	n := firstPoints
	for {
		e.extend(&s, n)
		r.BitsPerSHz, r.StandardError = e.against(&s.bits, &e.base.bits, e.baseBits, e.anchor.StandardError)
		r.EffectiveStreams, r.StreamsError = e.against(&s.streams, &e.base.streams, e.baseDoF, e.anchor.StreamsError)
		if r.StandardError <= e.target*evaluateSlack || n >= mostPoints {
			break
		}
		n = more(n, r.StandardError/e.target)
	}
	e.finish(&r)
	return r
}

// against is the mean of x helped by the mean of base, known as m ± se over more points:
//
//	E x ≈ mean(x) − b (mean(base) − m)
//
// with the regression coefficient b over the common points.
func (e *Engine) against(x, base *[replicates][]float64, m, se float64) (float64, float64) {
	n := len(x[0])
	if len(base[0]) < n {
		return overReplicates(x)
	}
	var sx, sb, sxb, sbb float64
	for r := range x {
		for i, v := range x[r] {
			b := base[r][i]
			sx += v
			sb += b
			sxb += v * b
			sbb += b * b
		}
	}
	count := float64(replicates * n)
	slope := 0.0
	if v := sbb - sb*sb/count; v > 1e-12*sbb {
		slope = (sxb - sx*sb/count) / v
	}
	var means [replicates]float64
	for r := range x {
		means[r] = mean(x[r]) - slope*(mean(base[r][:n])-m)
	}
	out, own := meanAndError(&means)
	return out, math.Hypot(own, slope*se)
}

// describe fills what of a result needs no sampling, from the loaded channel. thorough says to compute every pair of
// ports that may be the best, not the likeliest alone.
func (e *Engine) describe(near, far []antenna.Body, thorough bool) Result {
	c := e.channel
	nf, nn := c.far, c.near
	r := Result{}
	flat := make([]float64, nf*nn)
	for f := range nf {
		r.MeanPower = append(r.MeanPower, flat[f*nn:(f+1)*nn])
	}
	for n := range nn {
		for f := range nf {
			i := n*nf + f
			r.MeanPower[f][n] = abs2(c.direct[i]) + c.power[i]
		}
	}
	r.SingleChain, r.BestPair = e.best(thorough)
	r.NearPointing = pointing(e.near, near, e.setup.Elevation)
	r.FarPointing = pointing(e.far, far, -e.setup.Elevation)
	r.NearEnvelope, r.FarEnvelope = e.envelopes()
	return r
}

// envelopes are NearEnvelope and FarEnvelope of the loaded channel.
func (e *Engine) envelopes() (near, far float64) {
	near, far = -1, -1
	if !e.channel.random {
		return near, far
	}
	if len(e.likeNear) > 0 {
		near = e.envelope(e.likeNear, true)
	}
	if len(e.likeFar) > 0 {
		far = e.envelope(e.likeFar, false)
	}
	return near, far
}

// best is the rate of the best single pair and which it is. Pairs are ranked by a guess that is off by less than what
// separates pairs worth telling apart; the thorough then computes all that come near the top.
func (e *Engine) best(thorough bool) (bits float64, pair [2]int) {
	c := e.channel
	snr := e.setup.SNR
	guess := func(i int) float64 { return singleChainGuess(snr*abs2(c.direct[i]), snr*c.power[i]) }
	top, first := math.Inf(-1), 0
	for i := range c.direct {
		if g := guess(i); g > top*(1+1e-12) || i == 0 {
			top, first = g, i
		}
	}
	rate := func(i int) float64 { return singleChain(snr*abs2(c.direct[i]), snr*c.power[i]) }
	bits, pair = rate(first), [2]int{first / c.far, first % c.far}
	if !thorough {
		return bits, pair
	}
	for i := range c.direct {
		if i != first && guess(i) > top-0.05 {
			if b := rate(i); b > bits*(1+1e-12) {
				bits, pair = b, [2]int{i / c.far, i % c.far}
			}
		}
	}
	return bits, pair
}

// scatterCovariance is the covariance of the scattered part at one end, the other end's ports exciting equally.
func (e *Engine) scatterCovariance(near bool) []complex128 {
	c := e.channel
	own, other := c.far, c.near
	if near {
		own, other = c.near, c.far
	}
	out := make([]complex128, own*own)
	if len(c.paths) > 0 {
		for _, p := range c.paths {
			for i := range own {
				for j := range own {
					for k := range other {
						if near {
							out[i*own+j] += p[i*c.far+k] * conj(p[j*c.far+k])
						} else {
							out[i*own+j] += p[k*c.far+i] * conj(p[k*c.far+j])
						}
					}
				}
			}
		}
		return out
	}
	v, h, ov, oh := c.sv, c.sh, c.rv, c.rh
	if near {
		v, h, ov, oh = c.rv, c.rh, c.sv, c.sh
	}
	var tv, th float64
	for i := range other {
		tv += real(ov[i*other+i])
		th += real(oh[i*other+i])
	}
	wv := complex(e.scattered*(e.same*tv+e.cross*th), 0)
	wh := complex(e.scattered*(e.cross*tv+e.same*th), 0)
	for i := range out {
		out[i] = wv*v[i] + wh*h[i]
	}
	return out
}

func (e *Engine) envelope(like [][2]int, near bool) float64 {
	r := e.scatterCovariance(near)
	n := e.channel.far
	if near {
		n = e.channel.near
	}
	most := 0.0
	for _, p := range like {
		i, j := p[0], p[1]
		if q := real(r[i*n+i]) * real(r[j*n+j]); q > 0 {
			most = math.Max(most, abs2(r[i*n+j])/q)
		}
	}
	return math.Min(most, 1)
}
