package stream

import (
	"errors"
	"math"
	"slices"
)

// Correlated is what i.i.d. Rayleigh scatter between two correlated ends carries.
type Correlated struct {
	BitsPerSHz, StandardError float64
	EffectiveStreams          float64
	SingleChain               float64
	RateMultiple              float64
}

var (
	errSquare   = errors.New("a correlation matrix must be square, 1 to 16 rows")
	errHermite  = errors.New("a correlation matrix must equal its own conjugate transpose")
	errDiagonal = errors.New("a correlation matrix must have ones on its diagonal")
	errDefinite = errors.New("the correlation matrix is not positive semidefinite: no signals correlate like this")
	errSNR      = errors.New("the signal-to-noise ratio must be above 0 and finite")
)

// CheckCorrelation returns nil for a matrix (row by row) that can be the correlation of n signals: Hermitian, ones on
// its diagonal, no eigenvalue below −1e-4. The last is what four printed decimals may leave of a singular matrix.
func CheckCorrelation(r []complex128) error {
	n := int(math.Round(math.Sqrt(float64(len(r)))))
	if n < 1 || n*n != len(r) || n > maxPorts {
		return errSquare
	}
	for i := range n {
		if math.Abs(real(r[i*n+i])-1) > 1e-6 || math.Abs(imag(r[i*n+i])) > 1e-9 {
			return errDiagonal
		}
		for j := range i {
			if d := r[i*n+j] - conj(r[j*n+i]); !(abs2(d) <= 1e-18) {
				return errHermite
			}
		}
	}
	// Positive semidefinite within 1e-4: R + 1e-4 I has a Cholesky factor.
	m := slices.Clone(r)
	for i := range n {
		m[i*n+i] += 1e-4
	}
	for j := range n {
		d := real(m[j*n+j])
		for k := range j {
			d -= abs2(m[j*n+k])
		}
		if !(d > 0) {
			return errDefinite
		}
		d = math.Sqrt(d)
		m[j*n+j] = complex(d, 0)
		for i := j + 1; i < n; i++ {
			s := m[i*n+j]
			for k := range j {
				s -= m[i*n+k] * conj(m[j*n+k])
			}
			m[i*n+j] = s / complex(d, 0)
		}
	}
	return nil
}

// Kronecker is the ergodic capacity of H = A_far G A_nearᵀ, with A Aᴴ the correlation at each end and G independent
// circular Gaussian of unit power:
//
//	E log₂ det(I + ρ'HHᴴ),  ρ' = ρ per chain or ρ/N shared, N the near ports
//
// standard error at most 0.01 bit/s/Hz, the same at every call. ρ is linear. Telatar, Eur. Trans. Telecommun. 10 (1999);
// Kermoal et al., IEEE J. Sel. Areas Commun. 20 (2002) for the correlated form. The errors are those of
// CheckCorrelation, or that of a ρ not above 0.
func Kronecker(near, far []complex128, snr float64, power Power) (Correlated, error) {
	e, err := correlated(near, far, snr, power)
	if err != nil {
		return Correlated{}, err
	}
	e.anchor.SingleChain = singleChain(0, snr)
	e.settle()
	a := &e.anchor
	return Correlated{a.BitsPerSHz, a.StandardError, a.EffectiveStreams, a.SingleChain, a.RateMultiple}, nil
}

// Outage is the rate that the channel of Kronecker carries with probability 1 − p, from at least 8,192 points.
// Foschini and Gans, Wireless Pers. Commun. 6 (1998).
func Outage(near, far []complex128, snr float64, power Power, p float64) (float64, error) {
	e, err := correlated(near, far, snr, power)
	if err != nil {
		return 0, err
	}
	e.settle()
	if e.base.n < 1024 {
		e.extend(&e.base, 1024)
	}
	var all []float64
	for r := range e.base.bits {
		all = append(all, e.base.bits[r]...)
	}
	slices.Sort(all)
	x := p*float64(len(all)) - 0.5
	i := min(max(int(x), 0), len(all)-2)
	t := math.Min(math.Max(x-float64(i), 0), 1)
	return all[i] + t*(all[i+1]-all[i]), nil
}

func correlated(near, far []complex128, snr float64, power Power) (*Engine, error) {
	for _, r := range [][]complex128{near, far} {
		if err := CheckCorrelation(r); err != nil {
			return nil, err
		}
	}
	if !(snr > 0) || math.IsInf(snr, 1) {
		return nil, errSNR
	}
	nn, nf := int(math.Round(math.Sqrt(float64(len(near))))), int(math.Round(math.Sqrt(float64(len(far)))))
	e := &Engine{rho: snr, target: kroneckerTarget, setup: Setup{SNR: snr, Power: power}, channel: newChannel(nf, nn, 0), scattered: 1}
	if power == Shared {
		e.rho /= float64(nn)
	}
	copy(e.channel.trv, near)
	copy(e.channel.tsv, far)
	e.channel.random = true
	e.channel.factor(1, 1, 0)
	return e, nil
}
