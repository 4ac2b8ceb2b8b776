// Package stream computes what a mount carries: the channel between the ports of two mounts that face each other, its
// ergodic capacity, the streams it holds and what bolts do to them.
//
// # The channel
//
// With K the ratio of direct to scattered power (0 where there is no sight), in the frames of package antenna,
//
//	H = √(K/(1+K)) H_L + √(1/(1+K)) H_S                                    (far ports × near ports)
//	H_L,mn = (D₀/D_mn)(F_m^V F_n^V − F_m^H F_n^H) e^{−jkD_mn}              exact distances D_mn
//	H_S = Σ_pq √κ_pq A_far,p G_pq A_near,qᵀ                                p, q ∈ {V, H}
//	A_p A_pᴴ = R_p,  κ same = X/(1+X),  κ cross = 1/(1+X)                  X the cross-polar ratio
//
// G_pq has independent entries of unit power. Fields are relative to the top of the main lobe, so that pointing enters
// through F alone and |H_L| = 1 for the planned, aligned, co-polar pair. Surveyed reflectors replace class and K:
//
//	H = H_L + Σ_r a_r Σ_p e^{jψ_rp} F_r^p(far) F_r^p(near)ᵀ                spherical distances to the reflector
//
// with every ψ uniform and independent: the phase of a reflection, and whether it turns V against H, is not surveyed.
//
// # Using it
//
//	e, err := New(setup, plannedNear, plannedFar)   once per sheet: spectra, nodes, random points, the plan itself
//	r := e.Evaluate(near, far)                      full accuracy: standard error at most 0.01 bit/s/Hz
//	l := e.Around(near, far)                        once per state; its Anchor is Evaluate's answer
//	r = l.Evaluate(near, far)                       any geometry near it: common random numbers against the anchor
//
// Times on one core of 2026 for two crossed panels at each end: New 5 to 15 ms, Engine.Evaluate 0.5 to 1 ms,
// Local.Evaluate 0.05 to 0.15 ms.
//
// Of the bodies given later only position, azimuth, tilt and skew are read; patterns and ports are those given to New. An
// Engine and what is made from it keep scratch space and serve one goroutine.
package stream
