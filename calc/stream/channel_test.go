package stream

import (
	"math"
	"math/cmplx"
	"slices"
	"testing"

	"gonum.org/v1/gonum/integrate/quad"
	"gonum.org/v1/gonum/mathext"
	"pgregory.net/rapid"

	"crossplumb/calc/antenna"
	"crossplumb/calc/scatter"
)

// TestSingleChain against closed forms and an independent integral over the plane.
func TestSingleChain(t *testing.T) {
	// Rayleigh: e^{1/x} E₁(1/x)/ln 2 (Lee 1990). E₁ from its continued fraction (Abramowitz and Stegun 5.1.22).
	e1 := func(x float64) float64 { // e^x E₁(x)
		f := 0.0
		for k := 200; k >= 1; k-- {
			f = float64(k) / (1 + float64(k)/(x+f))
		}
		return 1 / (x + f)
	}
	for _, x := range []float64{0.05, 0.3, 1, 3, 8} {
		if got, want := singleChain(0, x), e1(1/x)/math.Ln2; math.Abs(got-want) > 1e-7 {
			t.Errorf("Rayleigh %v: %v, want %v", x, got, want)
		}
	}
	if got := singleChain(7, 0); got != 3 {
		t.Errorf("a fixed channel: %v, want log₂ 8", got)
	}
	if singleChain(0, 0) != 0 {
		t.Error("no channel")
	}
	rapid.Check(t, func(t *rapid.T) {
		direct, scattered := rapid.Float64Range(0.01, 300).Draw(t, "direct"), rapid.Float64Range(0.01, 300).Draw(t, "scatter")
		// E over h = √direct + √scatter·z, z by Gauss-Legendre in radius and trapezoid in angle.
		f := func(r float64) float64 {
			sum := 0.0
			const n = 64
			for i := range n {
				h := cmplx.Rect(math.Sqrt(scattered)*r, 2*math.Pi*float64(i)/n) + complex(math.Sqrt(direct), 0)
				sum += math.Log2(1 + abs2(h))
			}
			return sum / n * 2 * r * math.Exp(-r*r)
		}
		want := 0.0
		for i := range 14 {
			want += quad.Fixed(f, float64(i)*0.5, float64(i+1)*0.5, 20, nil, 0)
		}
		if got := singleChain(direct, scattered); math.Abs(got-want) > 2e-5*(1+want) {
			t.Fatalf("%v, want %v", got, want)
		}
		if g := singleChainGuess(direct, scattered) / math.Ln2; math.Abs(g-want) > 0.75 {
			t.Fatalf("guess %v for %v", g, want)
		}
	})
}

func TestSVD(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		rows, cols := rapid.IntRange(1, 6).Draw(t, "rows"), rapid.IntRange(1, 6).Draw(t, "cols")
		a := make([]complex128, rows*cols)
		for i := range a {
			a[i] = complex(rapid.Float64Range(-1, 1).Draw(t, "re"), rapid.Float64Range(-1, 1).Draw(t, "im"))
		}
		if rows > 1 && rapid.Bool().Draw(t, "singular") {
			for j := range cols {
				a[j*rows] = 2 * a[j*rows+1]
			}
		}
		u, s, v := svd(a, rows, cols, leastColumn)
		for j := range cols {
			for i := range rows {
				var x complex128
				for k := range min(rows, cols) {
					x += u[k*rows+i] * complex(s[k], 0) * conj(v[k*cols+j])
				}
				if cmplx.Abs(x-a[j*rows+i]) > 10*leastColumn*float64(rows*cols) { // what is not followed below it
					t.Fatalf("(%d,%d): %v, want %v", i, j, x, a[j*rows+i])
				}
			}
			if j > 0 && s[j] > s[j-1]*(1+1e-9) {
				t.Fatalf("order %v", s)
			}
		}
		for _, q := range []struct {
			m []complex128
			n int
		}{{u, rows}, {v, cols}} {
			for a := range q.n {
				for b := range q.n {
					var x complex128
					for i := range q.n {
						x += conj(q.m[a*q.n+i]) * q.m[b*q.n+i]
					}
					if a == b {
						x--
					}
					if cmplx.Abs(x) > 1e-12 {
						t.Fatalf("not unitary: %v", x)
					}
				}
			}
		}
	})
	// Small singular values to their own accuracy: diag(1, 1e-10) turned by known angles.
	c, sn := math.Cos(0.3), math.Sin(0.3)
	_, s, _ := svd([]complex128{complex(c, 0), complex(sn, 0), complex(-sn*1e-10, 0), complex(c*1e-10, 0)}, 2, 2, leastColumn)
	if math.Abs(s[1]/1e-10-1) > 1e-12 {
		t.Errorf("small value %v", s[1])
	}
}

// TestRate against determinant and trace by the singular values.
func TestRate(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		nf, nn := rapid.IntRange(1, 8).Draw(t, "far"), rapid.IntRange(1, 8).Draw(t, "near")
		rho := math.Pow(10, rapid.Float64Range(-2, 7).Draw(t, "rho"))
		c := newChannel(nf, nn, 0)
		for i := range c.h {
			c.h[i] = complex(rapid.Float64Range(-1, 1).Draw(t, "re"), rapid.Float64Range(-1, 1).Draw(t, "im"))
		}
		_, s, _ := svd(c.h, nf, nn, leastColumn)
		var bits, streams float64
		for _, x := range s {
			bits += math.Log2(1 + rho*x*x)
			streams += rho * x * x / (1 + rho*x*x)
		}
		b, d := c.rate(rho)
		if math.Abs(b-bits) > 1e-8*(1+bits) || math.Abs(d-streams) > 1e-6 {
			t.Fatalf("%v %v, want %v %v", b, d, bits, streams)
		}
	})
}

func TestPoints(t *testing.T) {
	t.Run("the table is Sobol's", func(t *testing.T) {
		// Second dimension by hand: polynomial x + 1, m₁ = 1, m_k = 2m_{k−1} ⊕ m_{k−1}: 1, 3, 5, 15.
		v := directions(3)
		for i, want := range []uint32{1, 3, 5, 15} {
			if got := v[1][i] >> (31 - i); got != want {
				t.Errorf("dimension 2, m%d = %d, want %d", i+1, got, want)
			}
		}
		n := 0
		for i := 0; i < len(sobolTable); n++ {
			degree := 0
			for sobolTable[i]>>(degree+1) != 0 {
				degree++
			}
			for k := 1; k <= degree; k++ {
				if m := sobolTable[i+k]; m%2 == 0 || m >= 1<<k {
					t.Fatalf("dimension %d: m%d = %d is no direction integer", n+2, k, m)
				}
			}
			i += degree + 1
		}
		if n != sobolDimensions-1 {
			t.Errorf("%d dimensions", n+1)
		}
	})
	t.Run("each replicate is a net", func(t *testing.T) {
		// The first 2^k points of a scrambled Sobol sequence fall one into each of 2^k equal cells of every coordinate.
		plain := directions(sobolDimensions)
		seed := uint64(5)
		for _, v := range [][][digits]uint32{plain, scrambled(plain, &seed)} {
			for d := range v {
				seen := map[uint32]bool{}
				x := uint32(0x5bd1e995)
				for i := range 256 {
					if i > 0 {
						c := 0
						for i>>c&1 == 0 {
							c++
						}
						x ^= v[d][c]
					}
					seen[x>>24] = true
				}
				if len(seen) != 256 {
					t.Fatalf("dimension %d: %d cells of 256", d+1, len(seen))
				}
			}
		}
	})
	t.Run("plain draws are standard", func(t *testing.T) { law(t, newPoints(3, 2, false, nil)) })
	t.Run("triangular draws keep the law", func(t *testing.T) {
		ref := newChannel(3, 3, 0)
		for i := range ref.lower {
			ref.lower[i] = complex(math.Sin(float64(3*i+1)), math.Cos(float64(5*i)))
		}
		for i := range 9 {
			ref.lower[i*(i+1)/2+i] = complex(0.5+0.1*float64(i), 0)
			ref.mean[i] = complex(0.3*float64(i%4), -0.2)
		}
		ref.sparse()
		law(t, newPoints(3, 3, false, ref))
	})
	t.Run("phases are uniform", func(t *testing.T) {
		p := newPoints(4, 1, true, nil)
		p.upTo(256, nil)
		var sum [4]complex128
		for r := range replicates {
			for i, z := range p.draws[r][0].w {
				if math.Abs(abs2(z)-1) > 1e-12 {
					t.Fatal(z)
				}
				sum[i%4] += z / (256 * replicates)
			}
		}
		for _, s := range sum {
			if cmplx.Abs(s) > 1e-2 {
				t.Error(s)
			}
		}
	})
	t.Run("the same at every call", func(t *testing.T) {
		a, b := newPoints(2, 2, false, nil), newPoints(2, 2, false, nil)
		a.upTo(64, nil)
		a.upTo(128, nil)
		b.upTo(128, nil)
		for r := range replicates {
			if w := slices.Concat(a.draws[r][0].w, a.draws[r][1].w); !slices.Equal(w, b.draws[r][0].w) {
				t.Fatal("a sequence grown in two steps differs")
			}
		}
	})
}

// law checks the first and second moments of all pairs of entries, and the fourth of each, of 32,768 points. Plain random
// points would err by 0.0055, √2·0.0055 and √20·0.0055; three times the second is allowed to all but the last.
func law(t *testing.T, p *points) {
	t.Helper()
	const n = 2048
	p.upTo(n, nil)
	size := p.rows * p.cols
	second := make([]complex128, size*size)
	pseudo := make([]complex128, size*size)
	first := make([]complex128, size)
	fourth := make([]float64, size)
	for r := range replicates {
		for i := range n {
			w := p.draws[r][0].w[i*size:][:size]
			for a := range w {
				first[a] += w[a] / (n * replicates)
				fourth[a] += abs2(w[a]) * abs2(w[a]) / (n * replicates)
				for b := range w {
					second[a*size+b] += w[a] * conj(w[b]) / (n * replicates)
					pseudo[a*size+b] += w[a] * w[b] / (n * replicates)
				}
			}
		}
	}
	for a := range size {
		if cmplx.Abs(first[a]) > 0.0235 || math.Abs(fourth[a]-2) > 0.075 {
			t.Errorf("entry %d: mean %v, fourth moment %v, want 0 and 2", a, first[a], fourth[a])
		}
		for b := range size {
			want := complex128(0)
			if a == b {
				want = 1
			}
			if cmplx.Abs(second[a*size+b]-want) > 0.0235 || cmplx.Abs(pseudo[a*size+b]) > 0.0235 {
				t.Errorf("entries %d %d: %v %v", a, b, second[a*size+b], pseudo[a*size+b])
			}
		}
	}
}

func TestTables(t *testing.T) {
	q := newQuantile()
	for i := range 4000 {
		u := (float64(i) + 0.37) / 4000
		if d := q.at(u) - mathext.NormalQuantile(u); math.Abs(d) > 2e-7 {
			t.Fatalf("quantile at %v off by %v", u, d)
		}
	}
	for m := 1; m <= 8; m++ {
		r := newRadial(m)
		for i := range 500 {
			z := -5.9 + 11.8*float64(i)/499
			x := r.at(z)
			p := mathext.GammaIncReg(float64(m), x*x)
			want := 0.5 * math.Erfc(-z/math.Sqrt2)
			if z > 0 {
				p, want = mathext.GammaIncRegComp(float64(m), x*x), 0.5*math.Erfc(z/math.Sqrt2)
			}
			if math.Abs(p/want-1) > 2e-3 {
				t.Fatalf("m = %d z = %v: P %v, want %v", m, z, p, want)
			}
		}
	}
}

// TestArrivalPhase: moving a far port toward the near mount must turn the phase of its scattered field and of its direct
// field the same way, or the two combine wrongly. In the limit of no spread the scatter comes from where the other end
// is, and its covariance must be that of a plane wave from there: R_mn = e^{+jkΩ·(r_m−r_n)}, as e^{−jkD} gives.
func TestArrivalPhase(t *testing.T) {
	iso := func(r, u, f float64) antenna.Body {
		return antenna.Body{Right: r, Up: u, Forward: f, Ports: make([]antenna.Port, 1)}
	}
	near := []antenna.Body{iso(0, 0, 0), iso(0.013, 0.004, 0.011)}
	far := []antenna.Body{iso(0, 0, 0), iso(-0.006, 0.009, 0.017)}
	el := 4 * degree
	around := scatter.Surroundings{Sight: true, K: 1, XPR: math.Inf(1)}
	around.Near.ElevationMean, around.Far.ElevationMean = el, -el
	e, err := New(Setup{Wavelength: lambda, Distance: 5e6, Elevation: el, SNR: 100, Around: around}, near, far)
	if err != nil {
		t.Fatal(err)
	}
	e.load(near, far, false)
	c := e.channel
	near2 := c.rv[1*2+0] / c.rv[0] // E h_1 h_0* over power, near
	if want := c.direct[1*2+0] / c.direct[0]; cmplx.Abs(near2-want) > 1e-5 {
		t.Errorf("near: scatter %v, direct %v", near2, want)
	}
	far2 := c.sv[1*2+0] / c.sv[0]
	if want := c.direct[0*2+1] / c.direct[0]; cmplx.Abs(far2-want) > 1e-5 {
		t.Errorf("far: scatter %v, direct %v", far2, want)
	}
	// By hand: Ω = (0, sin 4°, cos 4°), kΩ·r.
	s, co := math.Sincos(el)
	if want := cmplx.Rect(1, 2*math.Pi/lambda*(0.004*s+0.011*co)); cmplx.Abs(near2-want) > 1e-9 {
		t.Errorf("near: %v, want %v", near2, want)
	}
	if want := cmplx.Rect(1, 2*math.Pi/lambda*(-0.009*s+0.017*co)); cmplx.Abs(far2-want) > 1e-9 {
		t.Errorf("far: %v, want %v", far2, want)
	}
	// What the sign is worth: in 10° of spread with sight, two elements one behind the other.
	around = scatter.Surroundings{Sight: true, K: 2, XPR: math.Inf(1), Near: scatter.Angular{AzimuthSpread: 10 * degree, ElevationSpread: 2 * degree}, Far: scatter.Angular{AzimuthSpread: 10 * degree, ElevationSpread: 2 * degree}}
	line := []antenna.Body{iso(0, 0, 0), iso(0.4*lambda, 0, 0.3*lambda)}
	e, err = New(Setup{Wavelength: lambda, Distance: 2000, SNR: 100, Around: around}, line, line)
	if err != nil {
		t.Fatal(err)
	}
	right := e.Planned().BitsPerSHz
	e.load(line, line, false)
	for i := range e.channel.direct { // the wrong sign
		e.channel.mean[i] = conj(e.channel.direct[i])
	}
	e.u, e.v = nil, nil
	wrong := &Engine{setup: e.setup, rho: e.rho, target: e.target, channel: e.channel}
	e.fineNear.spread(line, e.near.ports, e.channel.rv, e.channel.rh, e.channel.trv, e.channel.trh)
	e.fineFar.spread(line, e.far.ports, e.channel.sv, e.channel.sh, e.channel.tsv, e.channel.tsh)
	e.channel.factor(e.scattered, e.same, e.cross)
	wrong.settle()
	if d := math.Abs(wrong.anchor.BitsPerSHz - right); d < 0.1 {
		t.Errorf("the wrong sign would move the rate by %.3f bit/s/Hz only: this test sees nothing", d)
	}
}
