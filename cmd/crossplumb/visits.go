package main

import "crossplumb/db"

// demoVisits is what the company did in the last days and has to do now. Each mount carries what the simulator planted
// in it; a test asks the verdict for it.
func demoVisits() []visit {
	const emergency = "Call the island exchange on channel 4. Meeting point for help: the gate at the road."
	return []visit{
		{
			site: "Saltpan Point", title: "Saltpan Point, quay mast: yearly look", crew: northCrew,
			lat: 46.118, lon: -31.402, access: "Along the quay; the mast stands behind the boat shed.", emergency: emergency,
			dayBefore: 9, climber: "Tam Verrill", until: db.StageSignedOff, deskRemark: "All as drawn.",
			mounts: []mountRun{{
				id: "m1", name: "quay to harbour office", sheet: crossedPairSheet("Saltpan Point, quay to harbour office", 112.5, -0.8, 1400, true),
				found: hang1("A", truth{skew: -0.4, tilt: -0.6, azimuth: 113.0}), left: hang1("A", truth{skew: -0.4, tilt: -0.6, azimuth: 113.0}),
				angles: goodLevel, planted: fault{word: "go"},
			}},
		},
		{
			site: "Tollan Quarry", title: "Tollan Quarry, link to Weir Barn", crew: northCrew,
			lat: 46.131, lon: -31.377, access: "Quarry gate, key at the weighbridge. Ask before blasting hours.", emergency: emergency,
			dayBefore: 3, climber: "Tam Verrill", until: db.StageHandedIn, remark: "Lower bracket bolt will not move, thread is gone.",
			open: []string{"Lower bracket bolt of A"},
			mounts: []mountRun{{
				id: "m1", name: "north-west", sheet: crossedPairSheet("Tollan Quarry, north-west", 318, 1.2, 2300, true).
					survey(tollanAt, weirAt, []obstacle{quarryRim, weirElms}, []landmarkAt{chapelTower, harbourLamp}),
				found: hang1("A", truth{skew: 9.5, tilt: 1.0, azimuth: 317.5}), left: hang1("A", truth{skew: 9.1, tilt: 1.0, azimuth: 317.5}),
				angles: goodLevel, planted: fault{word: "no-go", limit: "crosstalk_db", antenna: "A", quantity: "skew"},
			}},
		},
		{
			site: "Weir Barn", title: "Weir Barn, link to Tollan Quarry", crew: northCrew,
			lat: 46.146, lon: -31.398, access: "Through the yard; the dog is loud and harmless.", emergency: emergency,
			dayBefore: 2, climber: "Bea Quillan", until: db.StageHandedIn, remark: "Was 5 degrees off as found, turned and read again.",
			mounts: []mountRun{{
				id: "m1", name: "south-east", sheet: crossedPairSheet("Weir Barn, south-east", 138, -1.2, 2300, true).
					survey(weirAt, tollanAt, []obstacle{weirElms.back(2300), quarryRim.back(2300)}, []landmarkAt{chapelTower}),
				searches: []searchRun{{antenna: "A", axis: "azimuth", from: 120, to: 156, step: 6, top: 138.4, width: 40, peak: -63,
					beamwidth: 40, expected: -63, doubt: 1.6}},
				pages: []pageRun{
					pageOf("near", 2, 5, figures("1", -63, 25, 28, 20), figures("2", -69, 21, 28, 8)),
					pageOf("far", 2, 5, figures("1", -63, 26, 31, 21), figures("2", -69, 20, 22, 20)),
				},
				found: hang1("A", truth{skew: 5.2, tilt: -1.5, azimuth: 138.5}), left: hang1("A", truth{skew: 0.2, tilt: -1.5, azimuth: 138.5}),
				angles: goodLevel, planted: fault{word: "go"},
			}},
		},
		{
			site: "Lantern Knoll", title: "Lantern Knoll, village cell", crew: southCrew,
			lat: 46.092, lon: -31.420, access: "Footpath from the chapel, 15 minutes with the ladder.", emergency: emergency,
			dayBefore: 2, climber: "Odd Hessel", until: db.StageHandedIn, remark: "",
			mounts: []mountRun{{
				id: "m1", name: "village", sheet: omniPairSheet("Lantern Knoll, village", 205, 350, 620, 30),
				found: hang2(truth{skew: 0.5, tilt: -0.4}, truth{skew: -0.6, tilt: 0.3, place: offsets{Right: 632, Up: 3, Forward: -2}}),
				left:  hang2(truth{skew: 0.5, tilt: -0.4}, truth{skew: -0.6, tilt: 0.3, place: offsets{Right: 632, Up: 3, Forward: -2}}),
				tape:  wornTape, angles: goodLevel,
				planted: fault{word: "measure again", limit: "position_deviation_mm", antenna: "B", quantity: "position"},
			}},
		},
		{
			site: "Fallow Ridge", title: "Fallow Ridge, link to Saltpan Point", crew: northCrew,
			lat: 46.110, lon: -31.361, access: "Track is soft after rain; leave the van at the cattle grid.", emergency: emergency,
			dayBefore: 4, climber: "Tam Verrill", until: db.StageSentBack, remark: "Level was left in the van, angles are from the phone.",
			deskRemark: "The tilt decides and was read with the phone. Please read tilt and skew of A with a level.",
			mounts: []mountRun{{
				id: "m1", name: "west", sheet: crossedPairSheet("Fallow Ridge, west", 271, 0.6, 3100, true),
				found: hang1("A", truth{skew: 0.8, tilt: 3.4, azimuth: 271.5}), left: hang1("A", truth{skew: 0.8, tilt: 3.4, azimuth: 271.5}),
				angles: phoneTilt, planted: fault{word: "measure again", antenna: "A", quantity: "tilt"},
			}},
		},
		{
			site: "Corrow Hill", title: "Corrow Hill, two links", crew: northCrew,
			lat: 46.139, lon: -31.345, access: "Gate code from the desk. Last 200 m on foot.", emergency: emergency,
			dayBefore: 1, climber: "Bea Quillan", until: db.StageUnderWay,
			mounts: []mountRun{
				{
					id: "m1", name: "west, to Gannet Head", sheet: crossedPairSheet("Corrow Hill, west", 252, 0.4, 1900, false).
						survey(corrowAt, gannetAt, []obstacle{fuchsiaHedge}, []landmarkAt{chapelTower, warrenCairn}),
					found: hang1("A", truth{skew: 7.0, tilt: 0.2, azimuth: 251.5}), left: hang1("A", truth{skew: 0.4, tilt: 0.2, azimuth: 251.5}),
					leftSkip: []string{"A tilt"},
					angles:   goodLevel, planted: fault{word: "measure again", antenna: "A", quantity: "tilt"},
				},
				{
					id: "m2", name: "hamlet cell", sheet: omniPairSheet("Corrow Hill, hamlet cell", 30, 250, 500, 40),
					found: hang2(truth{skew: 1.0, tilt: 0.5}, truth{skew: 0.2, tilt: -0.7, place: offsets{Right: 505, Up: -4, Forward: 6}}),
					tape:  goodTape, angles: goodLevel, planted: fault{word: "go"},
				},
			},
		},
		{
			site: "Gannet Head", title: "Gannet Head, link to Corrow Hill", crew: northCrew,
			lat: 46.133715, lon: -31.368384, access: "Headland path, closed in winds that the warden names. Ring him first.", emergency: emergency,
			dayBefore: 0, climber: "Tam Verrill", until: db.StageIssued,
			mounts: []mountRun{{
				id: "m1", name: "north-east", sheet: crossedPairSheet("Gannet Head, north-east", 72, -0.4, 1900, true).
					survey(gannetAt, corrowAt, []obstacle{fuchsiaHedge.back(1900)}, []landmarkAt{chapelTower, warrenCairn}),
			}},
		},
		{
			site: "Peat Landing", title: "Peat Landing, two omnis on the store", crew: northCrew,
			lat: 46.101, lon: -31.388, access: "Roof hatch, key at the store.", emergency: emergency,
			dayBefore: 0, climber: "Bea Quillan", until: db.StageIssued,
			mounts: []mountRun{{
				id: "m1", name: "landing", sheet: omniPairSheet("Peat Landing, landing", 160, 300, 620, 30),
			}},
		},
		{
			site: "Chapel Ness", title: "Chapel Ness, link to Lantern Knoll", crew: southCrew,
			lat: 46.088, lon: -31.432, access: "Tower stairs, 96 steps, no lift for tools.", emergency: emergency,
			dayBefore: 0, climber: "Odd Hessel", until: db.StageIssued,
			mounts: []mountRun{{
				id: "m1", name: "tower, east", sheet: crossedPairSheet("Chapel Ness, tower, east", 64, 0.9, 1100, false),
			}},
		},
		{
			// Aimed by compass alone, the near dish was tightened on its side lobe, 9 degrees right of the main one.
			site: "Hollin Edge", title: "Hollin Edge, dish link to Kiln Garth", crew: northCrew,
			lat: 46.104, lon: -31.344, access: "Past the sheep wash; the gate sticks.", emergency: emergency,
			dayBefore: 5, climber: "Bea Quillan", until: db.StageHandedIn, remark: "Level stays low. Fog, nothing to sight by, compass only.",
			open: []string{"Level 22 dB under what was expected"},
			mounts: []mountRun{{
				id: "m1", name: "south", sheet: dishLinkSheet("Hollin Edge, south", 204, -0.3, 3400).
					survey(hollinAt, kilnAt, []obstacle{{"wool store", 900, 48}}, []landmarkAt{warrenCairn}),
				found: hang1("A", truth{skew: -0.3, tilt: -0.3, azimuth: 213}), left: hang1("A", truth{skew: -0.3, tilt: -0.3, azimuth: 213}),
				angles: goodLevel, bearing: &compass,
				searches: []searchRun{{antenna: "A", axis: "azimuth", from: 210.6, to: 215.4, step: 0.6, top: 213, width: 2.8, peak: -62.5,
					beamwidth: 5.6, expected: -42.4, doubt: 1.6}},
				pages: []pageRun{
					pageOf("near", 2, 1, figures("1", -63, 9, 9, 20), figures("2", -63, 9, 10, 19)),
					pageOf("far", 2, 1, figures("1", -63, 10, 10, 21), figures("2", -64, 9, 9, 20)),
				},
				planted: fault{word: "measure again", antenna: "A", quantity: "azimuth"},
			}},
		},
	}
}

func hang1(id string, t truth) map[string]truth { return map[string]truth{id: t} }

func hang2(a, b truth) map[string]truth { return map[string]truth{"A": a, "B": b} }
