package doubt

import (
	"math"
	"slices"
)

// MaxDims is how many variables draws may have. A mount of eight antennas facing
// eight has 90 random parts and a few dozen shared biases.
const MaxDims = len(lattice)

// BlockSize is how many points one block of draws has.
const BlockSize = 2048

// Draws are standard normal deviates for every variable of a computation, the
// same ones each time: randomised quasi-random points instead of random ones,
// because they fill the space more evenly. Each block is one shifted lattice of
// BlockSize points; blocks are shifted independently of each other.
//
// Reference: Sloan and Joe, Lattice Methods for Multiple Integration; propagation
// of distributions by draws: JCGM 101:2008.
type Draws struct {
	N, Dims int
	z       []float64 // [draw][dim]
}

// NewDraws makes blocks × BlockSize draws of dims variables. Panics beyond
// MaxDims.
//
// Every variable takes the midpoints of BlockSize equal shares of probability,
// once each in a block, so that a quantity which hangs on one variable alone has
// its quantiles to half a thousandth.
func NewDraws(blocks, dims int) *Draws {
	if dims > MaxDims {
		panic("doubt: more variables than the lattice has")
	}
	d := &Draws{N: blocks * BlockSize, Dims: dims, z: make([]float64, blocks*BlockSize*dims)}
	stream := splitMix(0x43726f7373706c62) // any fixed number: the answers must not differ from day to day
	var deviate [BlockSize]float64
	for b := range blocks {
		offset := (float64(b) + 0.5) / float64(blocks)
		for i := range deviate {
			deviate[i] = NormalQuantile((float64(i) + offset) / BlockSize)
		}
		for j := range dims {
			at, step := stream.next(), uint64(lattice[j])
			for i := range BlockSize {
				d.z[(b*BlockSize+i)*dims+j] = deviate[at%BlockSize]
				at += step
			}
		}
	}
	return d
}

// At returns the deviates of draw i, one for each variable.
func (d *Draws) At(i int) []float64 { return d.z[i*d.Dims : (i+1)*d.Dims] }

// splitMix is a small generator of well mixed 64-bit numbers from a counter, for
// the shifts alone.
// Reference: Steele, Lea and Flood, OOPSLA 2014.
type splitMix uint64

func (s *splitMix) next() uint64 {
	*s += 0x9e3779b97f4a7c15
	z := uint64(*s)
	z = (z ^ z>>30) * 0xbf58476d1ce4e5b9
	z = (z ^ z>>27) * 0x94d049bb133111eb
	return z ^ z>>31
}

// Summary is what draws of one quantity show.
type Summary struct {
	Median    float64
	U         float64 // standard deviation
	Low, High float64 // 2.5 % and 97.5 % points
}

// Summarise takes draws of one quantity. Infinite draws count in the median and
// the points but not in the standard deviation. The slice is sorted in place.
// Panics without draws.
func Summarise(x []float64) Summary {
	if len(x) == 0 {
		panic("doubt: no draws to summarise")
	}
	var sum, n float64
	for _, v := range x {
		if !math.IsInf(v, 0) {
			sum += v
			n++
		}
	}
	mean := sum / n
	sum = 0
	for _, v := range x {
		if !math.IsInf(v, 0) {
			sum += (v - mean) * (v - mean)
		}
	}
	slices.Sort(x)
	s := Summary{Median: quantile(x, 0.5), Low: quantile(x, 0.025), High: quantile(x, 0.975)}
	if n > 1 {
		s.U = math.Sqrt(sum / (n - 1))
	}
	return s
}

// quantile of sorted draws, linear between them.
// Reference: JCGM 101:2008, 7.7 (sorted model values as the distribution function).
func quantile(x []float64, p float64) float64 {
	at := p*float64(len(x)) - 0.5
	i := int(math.Floor(at))
	switch {
	case i < 0:
		return x[0]
	case i >= len(x)-1:
		return x[len(x)-1]
	case math.IsInf(x[i+1], 0) || math.IsInf(x[i], 0):
		return x[i]
	}
	t := at - float64(i)
	return x[i] + t*(x[i+1]-x[i])
}
