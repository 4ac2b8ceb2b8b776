// Package antenna describes what hangs on a mount: bodies, their patterns, their ports, the field each port
// receives from a direction, and the coupling of half-wave dipoles that stand beside each other.
//
// # Frames and signs
//
// All lengths are metres, all angles radians, amplitudes are linear, attenuations in decibels where the name says so.
//
// The mount frame has its origin at the datum of the mount. Forward is horizontal, along the planned true bearing to
// the far end; up is plumb; right is 90° clockwise of forward. Every picture is seen from behind the antennas, looking
// to the far end. The far mount has its own frame of the same kind, looking back.
//
//	azimuth  clockwise seen from above, 0 = forward
//	tilt     elevation of the boresight, up positive
//	skew     rotation about the boresight, clockwise positive seen from behind
//	slant    direction of the electric field from the vertical of the body, clockwise positive, modulo 180°
//
// The body is turned by its skew first, then raised by its tilt, then swung by its azimuth. Element offsets turn with
// the body. For omnidirectional antennas tilt is lean forward the wrong way round: a positive tilt leans the top of
// the antenna back, away from the far end; skew is lean to the right.
//
// A direction is (azimuth β, elevation ε), its unit vector in (right, up, forward)
//
//	Ω = (sin β cos ε, sin ε, cos β cos ε)
//
// and the field there has the components V along the direction of growing elevation and H along the direction of
// growing (clockwise) azimuth. 3GPP's φ runs counter-clockwise and its θ downwards, so its F_θ is −V and its F_φ is −H.
// Time dependence is e^{+jωt}. Right-hand polarization is IEEE's (Std 145): clockwise seen from behind.
//
// # Mirror
//
// Two ends that face each other swap right and left: a wave that is H for the one is −H for the other. The coupling of
// two ports along the line of sight is therefore V·V − H·H, without conjugate. +45° facing +45° couples nothing.
package antenna
