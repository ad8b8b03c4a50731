package turn

import "fmt"

// PowerCard is a card that needs no wind: stopping and backing, and the circle
// on the scene that calms the water. Neither is run by the model: sternway and
// a wave pattern are beyond it.
func PowerCard(n Name) (Card, error) {
	switch n {
	case StopBack:
		return stopBack(), nil
	case CalmingCircle:
		return calmingCircle(), nil
	}
	return Card{}, fmt.Errorf("%w: no card for %q", ErrManoeuvre, n)
}

func stopBack() Card {
	return Card{
		Name: StopBack,
		When: "Seen at once, twin screw, calm and confined water",
		Steps: []Step{
			spotter,
			plain("helm_over", "Helm hard over to the side of the fall until the stern is clear, about 60 degrees of change"),
			plain("back", "Engines astern with the helm the other way until the bow points back"),
			plain("ahead", "Slow ahead towards the person"),
			plain("neutral", "Engines out of gear before the person is abaft the bow"),
		},
		Cautions: []string{
			"Propeller: never astern with the person near the stern",
			"A single-screw vessel cannot be steered going astern; her stern walks to one side",
			"In a sea the stern takes water and the backing stops nothing",
		},
		Sources: []string{"common practice, from memory"},
	}
}

func calmingCircle() Card {
	return Card{
		Name: CalmingCircle,
		When: "On the scene with a larger vessel, before a boat is put in the water or the person is taken up; it does not bring a vessel back",
		Steps: []Step{
			spotter,
			plain("circle", "Circle the person at a distance, helm hard over, with way on"),
			plain("broken_water", "Go on until the waves inside the circle are broken"),
			plain("stop_to_windward", "Stop so that the vessel makes a lee, and put the boat in the water on the lee side"),
		},
		Cautions: []string{"Keep propeller and wake clear of the person", "A spotter on each side: the person changes sides of sight all round"},
		Sources:  []string{"IMRF Lifeline, Nov 2017", "ICAO/IMO JWG-SAR/24-WP.19; in IAMSAR Manual vol. III from 2019"},
	}
}
