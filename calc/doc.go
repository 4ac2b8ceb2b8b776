// Package calc is the root of the physics; it holds no code. This page fixes the
// frames and signs, once, for every package below it.
//
// # Units
//
// Inside: SI units and radians. At every border (JSON, screen, command line):
// degrees, millimetres or metres, MHz and dB, with the unit in the name, as in
// skew_deg or SpacingMM. The structs of calc/sheet mirror a document and so keep
// its border units, in their names too.
//
// # Mount frame
//
// The origin is the mount's datum (the centre of its first antenna as planned,
// less that antenna's planned position). Forward is horizontal along the planned
// true bearing of the path; up is plumb; right is 90° clockwise of forward as
// seen from above. A position is (right, up, forward) and stays in this frame
// however the body there is aimed. The far mount has a frame of its own, facing
// back along the path: with the ends D apart, the far position (r, u, f) is
// (−r, u, D − f) in the near frame.
//
// # Seen from behind
//
// Every drawing and every rotation is as seen by someone who stands behind the
// antenna and looks to the far end. Skew is the rotation of a body about its
// boresight, clockwise positive. Slant is the direction of a port's electric
// field from the vertical of its body, clockwise positive, modulo 180°. Azimuth
// is clockwise from true north, 0° to 360°. Tilt is the elevation of the
// boresight, up positive; an electrical tilt likewise moves the beam up when
// positive, so that the trade's "3° downtilt" is −3° here. For omnis, which have
// no boresight, skew is the lean to the right and tilt the lean forward.
//
// A body (antenna) has one position, azimuth, tilt and skew; its ports have
// fixed slants and offsets on it. A reading belongs to the body.
//
// # Fields
//
// Time goes as exp(+jωt). A field has a component V, upward (−θ̂), and a component
// H, toward growing azimuth (clockwise seen from above; the φ̂ of 3GPP and of most
// textbooks runs the other way). Right-hand is IEEE's: the field turns clockwise
// as seen from behind the antenna that transmits it (IEEE Std 145).
//
// # The mirror
//
// Two ends that face each other see each other's left as right. With port vectors
// (V, H), each in its own view from behind, the coupling of two ports is
//
//	c = e_nearᵀ · diag(1, −1) · e_far
//
// without conjugation. So +45° facing +45° is cross-polar (no coupling), +45°
// facing −45° couples fully, vertical faces vertical, horizontal faces
// horizontal, and two right-hand circular ports couple fully. Links with equal
// ±45° labels at both ends are therefore swapped by the mirror: normal, not a
// fault.
package calc
