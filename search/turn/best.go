package turn

import (
	"cmp"
	"errors"
	"fmt"
	"slices"
)

// Sight says how well the fall is known.
type Sight int

// The three situations of the trade (IAMSAR Manual vol. III, as summarised in
// reprints): seen from the helm and acted on at once; reported by a witness
// with some delay; found missing, time unknown.
const (
	InSight Sight = iota
	Reported
	Missing
)

// Choice is a manoeuvre with its rank and the reason in a sentence.
type Choice struct {
	Result
	Reason string
}

// Best runs every manoeuvre that applies and ranks them for the case, the best
// first. The order is advice: the master may decide otherwise, and whoever
// shows it says so. Those that do not apply are left out, with their reasons
// joined into refused.
func Best(c Case, sight Sight) (choices []Choice, refused error) {
	order := preferred(c, sight)
	var errs []error
	for _, p := range order {
		r, err := Plan(p.name, c)
		if err != nil {
			errs = append(errs, fmt.Errorf("%s: %w", p.name, err))
			continue
		}
		choices = append(choices, Choice{Result: r, Reason: p.reason})
	}
	if sight == InSight {
		// In sight, only time counts among the manoeuvres that keep it.
		slices.SortStableFunc(choices, func(a, b Choice) int {
			return cmp.Or(cmp.Compare(keepsSight(b.Name), keepsSight(a.Name)), cmp.Compare(a.TotalS, b.TotalS))
		})
	}
	return choices, errors.Join(errs...)
}

func keepsSight(n Name) int {
	if n == Single || n == SlowCircle || n == RaceTrack {
		return 1
	}
	return 0
}

type preference struct {
	name   Name
	reason string
}

// preferred is the order in which the trade would try them.
func preferred(c Case, sight Sight) []preference {
	single := preference{Single, "in sight and at once: the quickest way back, the person stays in view on the side of the turn"}
	slow := preference{SlowCircle, "a small boat at low speed: stern clear, engine idling, and round"}
	race := preference{RaceTrack, "in sight: longer, but the run in is straight and one helmsman can hold it"}
	williamson := preference{Williamson, "not in sight: it comes back onto the own track, also in the dark"}
	scharnow := preference{Scharnow, "the fall lies far enough astern: it saves the run ahead that a Williamson turn makes"}
	switch sight {
	case InSight:
		return []preference{single, slow, race, williamson}
	case Reported:
		return []preference{williamson, scharnow, single}
	}
	// The time is not trusted: only what comes back onto the track serves.
	return []preference{
		{Williamson, "the time of the fall is not known: it comes back onto the own track, to be searched back along"},
		scharnow,
	}
}
