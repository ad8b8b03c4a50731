package turn

// The cards under sail. Sequences and distances are those of the sources named
// in each; headings follow from the wind by arithmetic.

// spotter and pickUp stand in every card.
var (
	spotter = plain("spotter", "One person points at the casualty and does nothing else")
	pickUp  = plain("pick_up", "Sails off, 1 to 2 knots in the last lengths, stop with the person alongside to leeward, forward of the cockpit")
)

const pickUpSource = "pick-up speed 1 to 2 knots: yachtracing.postach.io, as printed there; leeward side: Sail, Dec 2005, p. 35, as reprinted at kobernus.com"

func (b sailing) quickStop() Card {
	return Card{
		Name: QuickStop,
		When: "Seen to fall, boat handled at once, any crew that can gybe her safely",
		Steps: []Step{
			spotter,
			b.on("head_to_wind", "Head to wind at once", 0, b.tack),
			b.over(b.on("tack_jib_backed", "Tack and leave the jib backed", closeHauled, -b.tack), 1, 2),
			b.on("bear_away", "Bear away past the casualty, mainsheet in, jib down", broadReachDeg, -b.tack),
			b.on("gybe", "Gybe when the casualty is abaft the beam", broadReachDeg, b.tack),
			b.on("come_up", "Come up to the casualty on a close reach or nearer the wind", closeReachDeg, b.tack),
			pickUp,
		},
		Cautions: []string{
			"Gybing: warn the crew, hold the mainsheet, heads down",
			"The last stop exactly alongside is the hard part",
			"With the engine on, see first that no line is in the water",
		},
		Sources: []string{"ptsail.org 2013 (from a page of the RORC)", "practice report, sailnet thread 9468", pickUpSource},
	}
}

func (b sailing) reachTack() Card {
	return Card{
		Name: ReachTack,
		When: "Seen to fall, small or inexperienced crew: two points of sail and no gybe",
		Steps: []Step{
			spotter,
			b.over(b.on("deep_beam_reach", "Sail 10 to 20 degrees below a beam reach; down to 2 lengths with practice", deepReachDeg, b.tack), 3, 4),
			b.on("tack", "Tack", 0, b.tack),
			b.on("point_at_casualty", "Point at the casualty, on a close reach; ease sheets to see that she slows", closeReachDeg, -b.tack),
			pickUp,
		},
		Cautions: []string{"Sight can be lost on the way out", "Needs room to leeward and to windward", "If the sails do not shake with the sheets eased she is too low: bear away first, then come up again"},
		Sources:  []string{"Sail, Dec 2005, p. 35, as reprinted at kobernus.com", pickUpSource},
	}
}

func (b sailing) figureEight(short bool) Card {
	least, most := 6.0, 8.0
	if short {
		least, most = 3, 4
	}
	return Card{
		Name: FigureEight,
		When: "Seen to fall, when a gybe has to be avoided",
		Steps: []Step{
			spotter,
			b.over(b.on("beam_reach", "To a beam reach and sail off", beamReachDeg, b.tack), least, most),
			b.on("tack", "Tack", 0, b.tack),
			b.on("broad_reach", "Bear away to a broad reach until the own wake is crossed", broadReachDeg, -b.tack),
			b.on("come_up", "Come up to the casualty on a close reach, sails shaking", closeReachDeg, -b.tack),
			pickUp,
		},
		Cautions: []string{"Goes far from the casualty", "Three points of sail", "Sources differ on the way out: 6 to 8 lengths, or 3 to 4"},
		Sources:  []string{"yachtracing.postach.io (6 to 8 lengths)", "Sail, Dec 2005, as reprinted at kobernus.com (3 to 4 lengths)"},
	}
}

func (b sailing) heaveTo() Card {
	return Card{
		Name: HeaveTo,
		When: "Seen to fall, short-handed: stops the boat near and gives time to think",
		Steps: []Step{
			spotter,
			b.on("tack_jib_fast", "Tack without letting go the jib sheet", closeHauled, -b.tack),
			b.over(plain("helm_to_leeward", "Helm to leeward and lash it: she lies to and drifts down"), 0, 0),
			plain("watch_drift", "Watch how she drifts against the casualty; ease or harden the mainsheet to steer the drift"),
			pickUp,
		},
		Cautions: []string{"Drift is hard to steer", "Boats with a big headsail lie to poorly", "On a lee shore the drift takes both ashore"},
		Sources:  []string{"Seamanship Secrets, p. 276 (part read)", "sailnet, practice reports"},
	}
}
