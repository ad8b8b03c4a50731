package turn

import (
	"testing"

	"wakeback/drift/nav"
)

// mariner is the published circle of the Mariner with the rudder at -35.
func mariner() Figures {
	return Figures{
		AdvanceM: nav.Some(679.0), TransferM: nav.Some(389.0), TacticalM: nav.Some(1027.0), SteadyRadiusM: nav.Some(576.0),
		T90S: nav.Some(135.1), T180S: nav.Some(282.6), T360S: nav.Some(582.0), SteadyMs: nav.Some(6.04),
	}
}

func TestMariner(t *testing.T) {
	start := FromRadius(15, 576)
	start.RudderRate, start.OrderDelayS = 5, 0
	f, err := FitFigures(start, mariner())
	if err != nil {
		t.Fatal(err)
	}
	t.Logf("%+v", f)
	g, _ := f.Model.Figures()
	for _, p := range mariner().pairs(g) {
		t.Logf("%+v", p)
	}
	for _, r := range rows(t, "manoeuvres.csv")[:10] {
		name, shift := Single, 0.0
		switch r["manoeuvre"] {
		case "williamson_60_20":
			name, shift = Williamson, 60
		case "williamson_80.4_20":
			name, shift = Williamson, 80.4
		case "scharnow_240_20":
			name, shift = Scharnow, 240
		case "single_360":
			continue
		}
		got, err := f.Model.Trial(name, shift)
		t.Logf("%s %s: %+v %v; want along %s off %s time %s run %s", r["manoeuvre"], r["side"], got, err, r["along_m_from_helm_order"], r["offset_m_plus_is_first_turn_side"], r["time_s"], r["track_m"])
	}
}
