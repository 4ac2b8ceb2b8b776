package stream

import (
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
}

// Result is what one mount, facing another, carries. Every mean is over the scatter.
type Result struct {
	BitsPerSHz    float64 // E log₂ det
	StandardError float64 // of BitsPerSHz, from independent randomisations; 0 where nothing is random

	EffectiveStreams float64 // E Σ ρ'λ/(1+ρ'λ), λ the eigenvalues of HHᴴ, ρ' = ρ or ρ/N
	SingleChain      float64 // C₁: E log₂(1 + ρ|h|²) of the best single port pair, bit/s/Hz
	BestPair         [2]int  // its near and far port, counted through the bodies in order
	RateMultiple     float64 // BitsPerSHz / SingleChain (array gain is in it, so it may pass the number of ports)

	// NearEnvelope and FarEnvelope are the largest |ρ|² of the scattered part between like-polarized ports of different
	// bodies, the other end's ports exciting equally; −1 where an end has no such pair. Meaningful only below K = 10 dB.
	NearEnvelope, FarEnvelope float64

	// MeanPower[f][n] is E|h|² from near port n to far port f, 1 being the planned, aligned, co-polar pair in free space.
	MeanPower [][]float64

	// NearPointing and FarPointing are, per body, how far the pattern toward the other end lies below the top of its main
	// lobe, in dB, 0 or more.
	NearPointing, FarPointing []float64
}
